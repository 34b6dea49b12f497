/** Reads a pipeline file and gathers all its mistakes, each with its place. */
import { createHash } from "node:crypto";
import { closeSync, openSync, readSync } from "node:fs";
import { dirname, resolve } from "node:path";
import { type Diagnostic, DiagnosticError } from "../diagnostics.ts";
import { crossChecks } from "./cross-checks.ts";
import { keysOf } from "./describe-schema.ts";
import { type PipelineDocument, type Place, readDocument } from "./document.ts";
import { explain, type Mistake, type Path } from "./explain.ts";
import { shown } from "./kind.ts";
import { isMapping } from "./plain-data.ts";
import { asPipeline, type Pipeline, pipelineSchema, type StageSchemas } from "./schema.ts";

export type { Place } from "./document.ts";
export type { Path } from "./explain.ts";

export interface LoadedPipeline {
  readonly pipeline: Pipeline;
  readonly text: string;
  /** Of the file's bytes, in hexadecimal. */
  readonly sha256: string;
  /** Path as the reader should see it. */
  readonly shownName: string;
  /** Folder of the file, absolute; paths inside the file are relative to it. */
  readonly folder: string;
  /** Place of the value at a path of the file (a block stands at its key), or of its nearest parent. */
  at(path: Path): Place;
}

const MOST_BYTES = 1_000_000;
/** A file of another sort has a mistake on every line; nobody reads more than this. */
const MOST_SHOWN = 100;

/**
 * @param path       where to read it
 * @param shownName  what diagnostics call it
 * @param stages     the stages there are
 * @throws DiagnosticError with every mistake found, in the order of the file
 */
export function loadPipeline(path: string, shownName: string, stages: StageSchemas): LoadedPipeline {
  const bytes = readBytes(path, shownName);
  const text = decode(bytes, shownName);
  const { pipeline, document } = readPipeline(text, shownName, stages);
  return {
    pipeline,
    text,
    sha256: createHash("sha256").update(bytes).digest("hex"),
    shownName,
    folder: dirname(resolve(path)),
    at: document.at,
  };
}

/**
 * The same for a text that is at hand.
 * @throws DiagnosticError
 */
export function readPipeline(
  text: string,
  shownName: string,
  stages: StageSchemas,
): { readonly pipeline: Pipeline; readonly document: PipelineDocument } {
  const document = readDocument(text);
  const { data } = document;
  const found: Diagnostic[] = document.mistakes.map(({ offset: _, ...rest }) => ({
    severity: "error",
    file: shownName,
    ...rest,
  }));
  const schema = pipelineSchema(stages);
  if (document.usable && !isMapping(data))
    found.push({
      code: "not-a-pipeline",
      severity: "error",
      file: shownName,
      line: 1,
      column: 1,
      problem: data === null ? "the file is empty" : "the file is not a mapping of keys to values",
      given: data === null ? "nothing" : shown(data),
      allowed: `a mapping with the keys ${keysOf(schema).join(", ")}`,
      todo: "write key: value lines; forebay schema describes them",
    });
  if (!document.usable || !isMapping(data)) throw new DiagnosticError(found);
  const parsed = schema.safeParse(data);
  const mistakes = parsed.success ? [] : parsed.error.issues.flatMap((issue) => explain(issue, schema, data));
  for (const mistake of [...mistakes, ...crossChecks(data)])
    found.push(asDiagnostic(mistake, document, shownName));
  if (!parsed.success || found.length > 0) throw new DiagnosticError(inOrder(found));
  return { pipeline: asPipeline(parsed.data, document.keysAt(["channels"])), document };
}

function asDiagnostic(mistake: Mistake, document: PipelineDocument, file: string): Diagnostic {
  const { path, at, ...rest } = mistake;
  return { severity: "error", file, ...(at === "key" ? document.atKey(path) : document.at(path)), ...rest };
}

function inOrder(found: Diagnostic[]): Diagnostic[] {
  found.sort((a, b) => a.line - b.line || a.column - b.column);
  const last = found[MOST_SHOWN];
  if (last === undefined) return found;
  return [
    ...found.slice(0, MOST_SHOWN),
    {
      code: "more-mistakes",
      severity: "error",
      file: last.file,
      line: last.line,
      column: last.column,
      problem: "there are more mistakes from here on",
      given: `more than ${MOST_SHOWN} mistakes`,
      allowed: "none",
      todo: "mend those above first, and check that this is a pipeline file",
    },
  ];
}

/** Troubles of the system that a person can mend. */
const SYSTEM_WORDS: Readonly<Record<string, string>> = {
  ENOENT: "no such file",
  ENOTDIR: "a part of the path is not a folder",
  EISDIR: "this is a folder",
  EACCES: "permission denied",
  EPERM: "permission denied",
  ENAMETOOLONG: "the path is too long",
  ELOOP: "the links go round in a circle",
  EMFILE: "too many files are open",
  ENXIO: "this is not a file",
};

function readBytes(path: string, shownName: string): Buffer {
  const bytes = Buffer.alloc(MOST_BYTES + 1);
  let length = 0;
  try {
    const file = openSync(path, "r");
    try {
      for (let got = -1; got !== 0 && length < bytes.length; length += got)
        got = readSync(file, bytes, length, bytes.length - length, null);
    } finally {
      closeSync(file);
    }
  } catch (error) {
    const { code } = error as NodeJS.ErrnoException;
    // A path with a NUL byte is refused by node itself.
    const words = code === "ERR_INVALID_ARG_VALUE" ? "not a path" : SYSTEM_WORDS[code ?? ""];
    if (words === undefined) throw error;
    throw fileProblem(shownName, "cannot-read", "the pipeline file cannot be read", words, "check the path");
  }
  if (length > MOST_BYTES)
    throw fileProblem(
      shownName,
      "file-too-large",
      "the file is too large to be a pipeline",
      `more than ${MOST_BYTES / 1e6} MB`,
      "give the pipeline file, not a log",
    );
  return bytes.subarray(0, length);
}

function decode(bytes: Buffer, shownName: string): string {
  let text: string;
  try {
    text = new TextDecoder("utf-8", { fatal: true }).decode(bytes);
  } catch {
    const { line, given } = firstBadLine(bytes);
    throw fileProblem(shownName, "not-utf-8", "the file is not UTF-8 text", given, "save it as UTF-8", line);
  }
  // biome-ignore lint/suspicious/noControlCharactersInRegex: control characters are what is looked for
  const control = /[\u0000-\u0008\u000b\u000c\u000e-\u001f\u007f]/.exec(text);
  if (control === null) return text;
  const before = text.slice(0, control.index).split(/\r\n?|\n/);
  throw fileProblem(
    shownName,
    "control-character",
    "the file holds a control character, which text does not",
    `character ${control[0].charCodeAt(0)}`,
    "save it as plain text in UTF-8, and write \\t or \\n inside double quotes",
    before.length,
    before.at(-1)!.length + 1,
  );
}

/** In UTF-8 no byte of a longer character looks like a line end, so lines can be tried one by one. */
function firstBadLine(bytes: Buffer): { line: number; given: string } {
  if ((bytes[0] === 0xff && bytes[1] === 0xfe) || (bytes[0] === 0xfe && bytes[1] === 0xff))
    return { line: 1, given: "UTF-16" };
  const strict = new TextDecoder("utf-8", { fatal: true });
  let start = 0;
  for (let line = 1; start <= bytes.length; line++) {
    const newline = bytes.indexOf(0x0a, start);
    const end = newline < 0 ? bytes.length : newline;
    try {
      strict.decode(bytes.subarray(start, end));
    } catch {
      return { line, given: "bytes that are not UTF-8 on this line" };
    }
    start = end + 1;
  }
  return { line: 1, given: "bytes that are not UTF-8" };
}

function fileProblem(
  file: string,
  code: string,
  problem: string,
  given: string,
  todo: string,
  line = 0,
  column = line === 0 ? 0 : 1,
): DiagnosticError {
  const allowed = `a YAML file in UTF-8, up to ${MOST_BYTES / 1e6} MB`;
  return new DiagnosticError([
    { code, severity: "error", file, line, column, problem, given, allowed, todo },
  ]);
}
