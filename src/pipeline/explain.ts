/** Turns what a schema found wrong into words with a place: which key or value, what is allowed, what to do. */
import { z } from "zod";
import { nearestName, quoted } from "../diagnostics.ts";
import { exampleOf, keysOf, stageNames, wordsOf } from "./describe-schema.ts";
import { factsOf, type IssueFacts, shown } from "./kind.ts";
import { isMapping, valueAt } from "./plain-data.ts";

export type Path = readonly (string | number)[];

/** A mistake in the pipeline file; its place is still a path. */
export interface Mistake {
  readonly code: string;
  readonly path: Path;
  /** Whether the key at the path is wrong, or its value. */
  readonly at: "key" | "value";
  readonly problem: string;
  readonly given: string;
  readonly allowed: string;
  readonly todo: string;
}

/** @param data  the file as it was read, which decides between the stages */
export function explain(issue: z.core.$ZodIssue, root: z.ZodType, data: unknown): Mistake[] {
  const path = issue.path.map((step) => (typeof step === "number" ? step : String(step)));
  if (issue.code === "unrecognized_keys") return unknownKeys(issue.keys, path, root, data);
  if (issue.code === "custom" && issue.params !== undefined) {
    const { code, given, allowed, todo, onKey } = issue.params as IssueFacts;
    if (code === "missing-key") return [missingKey(path, root, data)];
    const problem = `${label(path, data)}: ${issue.message}`;
    return [{ code, path, at: onKey === true ? "key" : "value", problem, given, allowed, todo }];
  }
  if (issue.code === "invalid_union" && path.at(-1) === "stage") return [wrongStage(path, root, data)];
  return [wrongMapping(path, root, data)];
}

function unknownKeys(keys: readonly string[], path: Path, root: z.ZodType, data: unknown): Mistake[] {
  const known = keysOf(schemaAt(root, path, data));
  return keys.map((key) => {
    const near = nearestName(key, known);
    return {
      code: "unknown-key",
      path: [...path, key],
      at: "key",
      problem: `${label(path, data)} has no key ${quoted(key)}`,
      given: quoted(key),
      allowed: known.join(", "),
      todo: near === undefined ? "take it out" : `write ${near}`,
    };
  });
}

function missingKey(path: Path, root: z.ZodType, data: unknown): Mistake {
  const key = String(path.at(-1));
  const parent = path.slice(0, -1);
  const schema = schemaAt(root, path, data);
  return {
    code: "missing-key",
    path: parent,
    at: "key",
    problem: `${label(parent, data)} has no ${key}`,
    given: `no ${key}`,
    allowed: wordsOf(schema),
    todo: `add ${key}: ${exampleOf(schema)}`,
  };
}

/** A chain entry whose stage is missing or unknown. */
function wrongStage(path: Path, root: z.ZodType, data: unknown): Mistake {
  const entryPath = path.slice(0, -1);
  const names = stageNames(schemaAt(root, entryPath, data));
  const entry = valueAt(data, entryPath);
  const given = valueAt(data, path);
  const allowed = names.join(", ");
  if (given === undefined || given === null) {
    const [first] = isMapping(entry) ? Object.keys(entry) : [];
    const meant = first !== undefined && names.includes(first) ? first : "resample";
    return {
      code: "missing-key",
      path: given === null ? path : entryPath,
      at: "key",
      problem: `${label(entryPath, data)} does not say which stage it is`,
      given: "no stage",
      allowed,
      todo: `write stage: ${meant}, with its settings beside it`,
    };
  }
  const near = nearestName(String(given), names);
  return {
    code: "unknown-stage",
    path,
    at: "value",
    problem:
      typeof given === "string" ? `there is no stage ${quoted(given)}` : "this is not the name of a stage",
    given: shown(given),
    allowed,
    todo: near === undefined ? "see forebay stages" : `write ${near}`,
  };
}

/** Something stands, or nothing at all, where a mapping with fixed keys is meant. */
function wrongMapping(path: Path, root: z.ZodType, data: unknown): Mistake {
  const given = valueAt(data, path);
  if (given === undefined && path.length > 0) return missingKey(path, root, data);
  const schema = schemaAt(root, path, data);
  const isStage = typeof given === "string" && stageNames(schema).includes(given);
  return {
    code: given === null ? "empty-value" : "wrong-type",
    path,
    at: "value",
    problem: `${label(path, data)} must be a mapping of keys to values`,
    given: shown(given),
    allowed: wordsOf(schema),
    todo: isStage ? `write { stage: ${given} } with its settings` : `write for instance ${exampleOf(schema)}`,
  };
}

/** Where a path leads, for people: `logs.time.column`, `fir.pass, entry 2`, `stage 3`. */
export function label(path: Path, data: unknown): string {
  if (path.length === 0) return "the pipeline";
  const inChain = path[0] === "chain" && typeof path[1] === "number";
  const stage = inChain ? valueAt(data, [...path.slice(0, 2), "stage"]) : undefined;
  let said = inChain ? (typeof stage === "string" ? quoted(stage) : `stage ${Number(path[1]) + 1}`) : "";
  for (let i = inChain ? 2 : 0; i < path.length; i++) {
    const step = path[i]!;
    if (typeof step === "string")
      said += `${said === "" ? "" : typeof path[i - 1] === "number" && i > 2 ? ", " : "."}${quoted(step)}`;
    // A lone value that stands for a list of one has no number.
    else if (Array.isArray(valueAt(data, path.slice(0, i)))) said += `, entry ${step + 1}`;
  }
  return said;
}

/** The schema that judges the value at a path. */
function schemaAt(root: z.ZodType, path: Path, data: unknown): z.ZodType | undefined {
  let schema: z.ZodType | undefined = choose(root, data);
  for (const [i, step] of path.entries()) {
    if (schema === undefined) return undefined;
    const next: z.ZodType | undefined =
      schema instanceof z.ZodObject
        ? (schema.shape[step] as z.ZodType | undefined)
        : factsOf(schema)?.element;
    schema = next === undefined ? undefined : choose(next, valueAt(data, path.slice(0, i + 1)));
  }
  return schema;
}

/** Through `optional`, defaults and the choice of a stage. */
function choose(schema: z.ZodType, value: unknown): z.ZodType {
  if (schema instanceof z.ZodOptional || schema instanceof z.ZodPrefault)
    return factsOf(schema) === undefined ? choose(schema.unwrap() as z.ZodType, value) : schema;
  if (!(schema instanceof z.ZodDiscriminatedUnion)) return schema;
  const stage = valueAt(value, ["stage"]);
  const options = schema.options as z.ZodObject[];
  return options.find((option) => (option.shape["stage"] as z.ZodLiteral).value === stage) ?? schema;
}
