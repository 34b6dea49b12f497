/** Kinds made of other kinds: lists, records, mappings with fixed keys, and a stage's settings. */
import { z } from "zod";
import { exampleOf, wordsOf } from "./describe-schema.ts";
import {
  factsOf,
  type IssueFacts,
  type JsonSchema,
  type Kind,
  type KindFacts,
  makeKind,
  type PartIssues,
  wrongType,
} from "./kind.ts";
import { isMapping } from "./plain-data.ts";
import { name, nameMisfit } from "./texts.ts";

/** JSON Schema of what may stand in the file; every kind brings its own. */
export function jsonSchemaOf(schema: z.ZodType): JsonSchema {
  const made = z.toJSONSchema(schema, {
    io: "input",
    unrepresentable: "any",
    override: ({ zodSchema, jsonSchema }) => {
      const facts = factsOf(zodSchema);
      if (facts === undefined) return;
      const { default: fallback } = jsonSchema;
      for (const key of Object.keys(jsonSchema)) delete (jsonSchema as JsonSchema)[key];
      Object.assign(
        jsonSchema,
        facts.json(),
        { description: facts.about },
        fallback === undefined ? {} : { default: fallback },
      );
    },
  }) as JsonSchema;
  return made;
}

/** The same without the dialect's address, for use inside another schema. */
function innerJsonSchema(schema: z.ZodType): JsonSchema {
  const { $schema: _, ...rest } = jsonSchemaOf(schema);
  return rest;
}

/** Nobody reads more bad entries of one collection than this, and each costs time. */
const MOST_PARTS = 200;

interface ListTold {
  readonly about: string;
  readonly min?: number;
  readonly max?: number;
  /** A lone element may stand without its list. */
  readonly single?: boolean;
  readonly default?: readonly unknown[];
}

/** A list of one kind. */
export function list<T>(element: Kind<T>, o: ListTold): Kind<T[]> {
  const min = o.min ?? 0;
  const inner = factsOf(element);
  const size = sizeWords(min, o.max);
  const facts: KindFacts = {
    kind: `list, each a ${inner?.kind ?? "mapping"}`,
    about: o.about,
    ...(inner?.unit === undefined ? {} : { unit: inner.unit }),
    ...(o.default === undefined ? {} : { default: JSON.stringify(o.default) }),
    allowed: `a list${size === "" ? "" : ` of ${size}`}${o.single === true ? " (one may stand alone)" : ""}, each: ${wordsOf(element)}`,
    example: `[${exampleOf(element)}]`,
    element,
    json: () => {
      const items = innerJsonSchema(element);
      const many = {
        type: "array",
        items,
        ...(min > 0 ? { minItems: min } : {}),
        ...(o.max === undefined ? {} : { maxItems: o.max }),
      };
      return o.single === true ? { anyOf: [items, many] } : many;
    },
  };
  return makeKind<T[]>(
    facts,
    (value) => {
      const given = Array.isArray(value) ? value : o.single === true ? [value] : null;
      if (given === null) return wrongType(value, "a list", facts);
      const parts: PartIssues[] = [];
      const is: T[] = [];
      if (given.length < min || given.length > (o.max ?? Number.POSITIVE_INFINITY))
        parts.push({ issues: [wrongLength("list", given.length, min, size)] });
      for (const [at, part] of given.entries()) {
        if (parts.length > MOST_PARTS) break;
        // A hole in the list is an empty value, not a missing setting.
        const parsed = element.safeParse(part ?? null);
        if (parsed.success) is.push(parsed.data);
        else parts.push({ at, issues: parsed.error.issues });
      }
      return parts.length > 0 ? parts : { is };
    },
    o.default,
  );
}

function sizeWords(min: number, max: number | undefined): string {
  if (max === undefined) return min === 0 ? "" : `at least ${min}`;
  if (min === max) return `${min}`;
  return min === 0 ? `up to ${max}` : `${min} to ${max}`;
}

/** A mapping of names of the user's choice to one kind. */
export function record<T>(
  element: z.ZodType<T>,
  o: { readonly about: string; readonly min?: number },
): Kind<Record<string, T>> {
  const facts: KindFacts = {
    kind: "mapping of names",
    about: o.about,
    allowed: `a mapping of names, each: ${wordsOf(element)}`,
    example: `{ first: ${exampleOf(element)} }`,
    element,
    json: () => ({
      type: "object",
      propertyNames: innerJsonSchema(name({ about: "A name." })),
      additionalProperties: innerJsonSchema(element),
      ...(o.min === undefined ? {} : { minProperties: o.min }),
    }),
  };
  return makeKind<Record<string, T>>(facts, (value) => {
    if (!isMapping(value)) return wrongType(value, "a mapping of names", facts);
    const keys = Object.keys(value);
    const parts: PartIssues[] = [];
    const is: Record<string, T> = {};
    const min = o.min ?? 0;
    if (keys.length < min)
      parts.push({ issues: [wrongLength("mapping", keys.length, min, `at least ${min}`)] });
    for (const key of keys) {
      if (parts.length > MOST_PARTS) break;
      const bad = nameMisfit(key);
      if (bad !== null) parts.push({ at: key, issues: [custom(bad.problem, { ...bad.facts, onKey: true })] });
      const parsed = element.safeParse(value[key] ?? null);
      // Defined, not assigned: a name such as __proto__ must stay a name.
      if (parsed.success) Object.defineProperty(is, key, { ...OWN, value: parsed.data });
      else parts.push({ at: key, issues: parsed.error.issues });
    }
    return parts.length > 0 ? parts : { is };
  });
}

const OWN = { enumerable: true, configurable: true, writable: true };

const custom = (message: string, params: IssueFacts): z.core.$ZodIssue => ({
  code: "custom",
  path: [],
  message,
  params,
});

function wrongLength(what: string, given: number, min: number, allowed: string): z.core.$ZodIssue {
  return custom(`the ${what} has too ${given < min ? "few" : "many"} entries`, {
    code: "list-length",
    given: `${given} ${given === 1 ? "entry" : "entries"}`,
    allowed,
    todo: given < min ? "add entries" : "take entries out",
  });
}

/** A mapping with fixed keys; unknown keys are errors. */
export function strictObject<S extends z.core.$ZodLooseShape>(shape: S, about?: string) {
  const made = z.strictObject(shape);
  return about === undefined ? made : made.meta({ description: about });
}

/** A stage's settings: its own kinds and the list of channels that it works on. */
export function stageSettings<const S extends z.core.$ZodLooseShape>(stage: string, shape: S) {
  return z
    .strictObject({
      ...shape,
      channels: list(name({ about: "A channel." }), {
        min: 1,
        about: "Channels that the stage works on; all when left out.",
      }).optional(),
    })
    .meta({ title: stage });
}
