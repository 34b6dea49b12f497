/** What a schema takes, in words and by example; for diagnostics and documentation. */
import { z } from "zod";
import { factsOf, type KindFacts } from "./kind.ts";

/** What may stand there, in words. */
export function wordsOf(schema: z.ZodType | undefined): string {
  if (schema === undefined) return "nothing";
  const facts = factsOf(schema);
  if (facts !== undefined) return facts.allowed;
  const inner = unwrapped(schema);
  return inner instanceof z.ZodDiscriminatedUnion
    ? `a mapping with stage: and its settings; stages: ${stageNames(inner).join(", ")}`
    : `a mapping with the keys ${keysOf(inner).join(", ")}`;
}

/** A value as it would stand in the file; of a mapping, what it cannot do without. */
export function exampleOf(schema: z.ZodType | undefined): string {
  if (schema === undefined) return "{}";
  const facts = factsOf(schema);
  if (facts !== undefined) return facts.example;
  const inner = unwrapped(schema);
  if (inner instanceof z.ZodLiteral) return String(inner.value);
  if (inner instanceof z.ZodDiscriminatedUnion) return exampleOf(inner.options[0] as z.ZodType);
  if (!(inner instanceof z.ZodObject)) return "{}";
  const needed = Object.entries(inner.shape as Record<string, z.ZodType>).filter(([, part]) =>
    isNeeded(part),
  );
  return needed.length === 0
    ? "{}"
    : `{ ${needed.map(([key, part]) => `${key}: ${exampleOf(part)}`).join(", ")} }`;
}

/** Whether a setting must be given. */
export const isNeeded = (schema: z.ZodType): boolean => schema._zod.optin === undefined;

/** Through `optional` and defaults, as far as a kind's own facts. */
export function unwrapped(schema: z.ZodType): z.ZodType {
  return schema instanceof z.ZodOptional || schema instanceof z.ZodPrefault
    ? unwrapped(schema.unwrap() as z.ZodType)
    : schema;
}

/** Names of the stages that a choice of stage knows. */
export function stageNames(schema: z.ZodType | undefined): string[] {
  if (!(schema instanceof z.ZodDiscriminatedUnion)) return [];
  return (schema.options as z.ZodObject[]).map((option) =>
    String((option.shape["stage"] as z.ZodLiteral).value),
  );
}

/** Keys of a mapping with fixed keys. */
export const keysOf = (schema: z.ZodType | undefined): string[] =>
  schema instanceof z.ZodObject ? Object.keys(schema.shape) : [];

export interface DescribedSetting {
  /** As a person would say it: `bands.NAME.from`. */
  readonly key: string;
  readonly schema: z.ZodType;
  /** undefined for a mapping with fixed keys, whose keys follow. */
  readonly facts: KindFacts | undefined;
  readonly about: string | undefined;
}

/** All settings of a mapping, those inside others after them. */
export function settingsOf(mapping: z.ZodObject, prefix = ""): DescribedSetting[] {
  return Object.entries(mapping.shape as Record<string, z.ZodType>).flatMap(([name, schema]) => {
    const key = `${prefix}${name}`;
    const facts = factsOf(schema);
    const inner = facts === undefined ? unwrapped(schema) : facts.element && unwrapped(facts.element);
    const about = facts?.about ?? inner?.meta()?.description;
    const between = facts === undefined ? "." : facts.kind.startsWith("list") ? "[ ]." : ".NAME.";
    return [
      { key, schema, facts, about },
      ...(inner instanceof z.ZodObject ? settingsOf(inner, `${key}${between}`) : []),
    ];
  });
}
