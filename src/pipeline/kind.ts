/**
 * What a setting may be, said once: how it is read, and the facts from which its documentation, its JSON
 * Schema and its diagnostics are made.
 */
import { z } from "zod";
import { quoted } from "../diagnostics.ts";
import type { Refused } from "./quantities.ts";

export type JsonSchema = Record<string, unknown>;

export interface KindFacts {
  /** For people: `length of time`. */
  readonly kind: string;
  /** One sentence. */
  readonly about: string;
  readonly unit?: string;
  /** As it would stand in the file. */
  readonly default?: string;
  /** Allowed range or choices. */
  readonly allowed: string;
  /** A value as it would stand in the file. */
  readonly example: string;
  /** JSON Schema of what may stand in the file, without description and default. */
  readonly json: () => JsonSchema;
  /** Kind of the elements of a list or of the values of a record. */
  readonly element?: z.ZodType;
}

/** What an issue of a kind carries beside its message, which is the problem in words. */
export interface IssueFacts {
  readonly code: string;
  readonly given: string;
  readonly allowed: string;
  readonly todo: string;
  /** The key is wrong, not its value. */
  readonly onKey?: boolean;
}

/** A value that a kind does not take. */
export class Misfit {
  readonly facts: IssueFacts;
  readonly problem: string;
  constructor(problem: string, facts: IssueFacts) {
    this.problem = problem;
    this.facts = facts;
  }
}

export type Kind<T> = z.ZodType<T, unknown>;

const FACTS = new WeakMap<z.core.$ZodType, KindFacts>();

/** Facts of a kind, looked up through `optional` and defaults; undefined for a plain object schema. */
export function factsOf(schema: z.core.$ZodType): KindFacts | undefined {
  const facts = FACTS.get(schema);
  if (facts !== undefined) return facts;
  const inner = (schema._zod.def as { innerType?: z.core.$ZodType }).innerType;
  return inner === undefined ? undefined : factsOf(inner);
}

/** Issues of the parts of a collection, with the place of each part. */
export interface PartIssues {
  /** undefined: the collection itself. */
  readonly at?: string | number;
  readonly issues: readonly z.core.$ZodIssue[];
}

/** Reads a present value: what it means, a misfit, or the issues of its parts. */
export type ReadValue<T> = (value: unknown) => { readonly is: T } | Misfit | readonly PartIssues[];

/**
 * @param fallback  stands in for a setting that is left out, as if it had been written
 * @throws when the fallback does not fit the kind itself
 */
export function makeKind<T>(facts: KindFacts, read: ReadValue<T>, fallback?: unknown): Kind<T> {
  const kind = z.unknown().transform((value, ctx): T => {
    const result = value === undefined || value === null ? nothing(value, facts) : read(value);
    if (result instanceof Misfit) {
      ctx.addIssue({ code: "custom", message: result.problem, params: result.facts, input: value });
      return z.NEVER;
    }
    if ("is" in result) return result.is;
    for (const { at, issues } of result)
      for (const issue of issues)
        ctx.issues.push({
          ...issue,
          path: at === undefined ? issue.path : [at, ...issue.path],
          input: undefined,
        } as z.core.$ZodRawIssue);
    return z.NEVER;
  });
  FACTS.set(kind, facts);
  if (fallback === undefined) return kind;
  if (!kind.safeParse(fallback).success) throw new Error(`default of "${facts.about}" does not fit`);
  const withFallback = kind.prefault(fallback as never);
  FACTS.set(withFallback, facts);
  return withFallback;
}

function nothing(value: undefined | null, facts: KindFacts): Misfit {
  return value === undefined
    ? new Misfit("a setting is missing", {
        code: "missing-key",
        given: "nothing",
        allowed: facts.allowed,
        todo: `add it, for instance ${facts.example}`,
      })
    : new Misfit("the setting has no value", {
        code: "empty-value",
        given: "nothing",
        allowed: facts.allowed,
        todo: `write a value, for instance ${facts.example}, or take it out`,
      });
}

/** Shows a value from the file in a few words; safe for any value, cyclic ones too. */
export function shown(value: unknown): string {
  if (typeof value === "string") return value.trim() === "" ? "an empty text" : quoted(value);
  if (Array.isArray(value)) return `a list of ${value.length}`;
  if (value !== null && typeof value === "object") {
    const keys = Object.keys(value);
    const some = keys.slice(0, 3).join(", ");
    return keys.length === 0 ? "a mapping without keys" : quoted(`a mapping with ${some}`);
  }
  return value === null || value === undefined ? "nothing" : quoted(String(value));
}

/** A kind that is read from text by one of the parsers of quantities. */
export function quantityKind<T extends object, U>(
  facts: KindFacts,
  parse: (text: string) => T | Refused,
  accept: (parsed: T) => { readonly is: U } | { readonly problem: string; readonly todo: string },
  fallback?: string,
): Kind<U> {
  return makeKind<U>(
    facts,
    (value) => {
      if (typeof value === "number") {
        const parsed = parse(String(value));
        return new Misfit(`a number without a unit, where a ${facts.kind} is meant`, {
          code: "no-unit",
          given: shown(value),
          allowed: facts.allowed,
          todo: "error" in parsed ? (parsed as Refused).error.todo : `write for instance ${facts.example}`,
        });
      }
      if (typeof value !== "string") return wrongType(value, `a ${facts.kind}`, facts);
      const parsed = parse(value);
      if ("error" in parsed) {
        const { given, todo } = (parsed as Refused).error;
        return new Misfit(`this is not a ${facts.kind}`, {
          code: "not-a-quantity",
          given,
          allowed: facts.allowed,
          todo,
        });
      }
      const accepted = accept(parsed as T);
      return "is" in accepted
        ? accepted
        : new Misfit(accepted.problem, {
            code: "out-of-range",
            given: shown(value),
            allowed: facts.allowed,
            todo: accepted.todo,
          });
    },
    fallback,
  );
}

export function wrongType(value: unknown, wanted: string, facts: KindFacts): Misfit {
  const word =
    typeof value === "boolean"
      ? "true or false"
      : Array.isArray(value)
        ? "a list"
        : typeof value === "object"
          ? "a mapping"
          : typeof value === "string"
            ? "a text"
            : `a ${typeof value}`;
  return new Misfit(`${word} stands where ${wanted} is meant`, {
    code: "wrong-type",
    given: shown(value),
    allowed: facts.allowed,
    todo: `write for instance ${facts.example}`,
  });
}
