/** What can be wrong with the YAML itself, in the words of a diagnostic. */
import { type Document, visit, type YAMLError } from "yaml";
import { quoted } from "../diagnostics.ts";

export interface YamlMistake {
  readonly code: string;
  /** Characters from the start of the file. */
  readonly offset: number;
  readonly problem: string;
  readonly given: string;
  readonly allowed: string;
  readonly todo: string;
}

/** No file is told more mistakes of one sort than this. */
export const MOST_TOLD = 200;

/** Problem and remedy for the commonest codes of the YAML reader; the others keep its own words. */
const WORDS: Partial<Record<YAMLError["code"], readonly [problem: string, todo: string]>> = {
  BAD_INDENT: ["the indentation does not fit", "align the keys of one mapping in one column"],
  TAB_AS_INDENT: ["a tab stands in the indentation", "indent with blanks"],
  MISSING_CHAR: ["a closing sign is missing", "close the quote or bracket"],
  BLOCK_AS_IMPLICIT_KEY: [
    "a second colon stands in one line",
    "put the text into quotes, or the inner keys on lines of their own",
  ],
  BLOCK_IN_FLOW: ["a block stands inside brackets", "write it inside brackets too, or without them"],
  MULTILINE_IMPLICIT_KEY: ["a key runs over more than one line", "add the colon that is missing"],
  KEY_OVER_1024_CHARS: ["a key is very long", "add the colon that is missing"],
  NON_STRING_KEY: ["a key is not a plain text", "write a plain key"],
};

/** The mistakes up to the first that breaks the structure; what the reader says after that is of its making. */
export function yamlMistakes(document: Document.Parsed, text: string): YamlMistake[] {
  const { errors } = document;
  const broken = errors.findIndex((e) => e.code === "BAD_INDENT" || e.code === "MISSING_CHAR");
  const told = errors.slice(0, Math.min(MOST_TOLD, broken < 0 ? errors.length : broken + 1));
  const mistakes = told.map((error) => yamlMistake(error, text));
  const bracket = broken < 0 || broken >= MOST_TOLD ? null : unclosedBracket(document, text);
  if (bracket !== null) mistakes[broken] = unclosed(bracket, text);
  return mistakes;
}

function yamlMistake(error: YAMLError, text: string): YamlMistake {
  const [offset] = error.pos;
  if (error.code === "MULTIPLE_DOCS")
    return {
      code: "several-documents",
      offset,
      problem: "the file holds more than one document",
      given: "a line --- or ... with more below it",
      allowed: "one pipeline a file",
      todo: "put each pipeline into a file of its own",
    };
  const [problem, todo] = WORDS[error.code] ?? [
    `this is not YAML: ${quoted(error.message.split("\n")[0] ?? "")}`,
    "put texts with special signs into quotes, and look at the line before too",
  ];
  return { code: "yaml-syntax", offset, problem, given: lineAt(text, offset), allowed: "YAML 1.2", todo };
}

function lineAt(text: string, offset: number): string {
  const start = text.lastIndexOf("\n", offset - 1) + 1;
  const end = text.indexOf("\n", start);
  const line = text.slice(start, end < 0 ? undefined : end).trim();
  return line === "" ? "the end of the file" : quoted(line);
}

/** Offset of the first bracket that is never closed. */
function unclosedBracket(document: Document.Parsed, text: string): number | null {
  let found: number | null = null;
  visit(document, {
    Collection: (_key, node) => {
      if (node.flow !== true || !node.range || /[\]}]/.test(text[node.range[1] - 1] ?? "")) return undefined;
      found = node.range[0];
      return visit.BREAK;
    },
  });
  return found;
}

function unclosed(offset: number, text: string): YamlMistake {
  return {
    code: "yaml-syntax",
    offset,
    problem: "this bracket is not closed",
    given: lineAt(text, offset),
    allowed: "YAML 1.2",
    todo: `add ${text[offset] === "[" ? "]" : "}"} where it ends`,
  };
}

export function duplicateKey(key: string, offset: number): YamlMistake {
  return {
    code: "duplicate-key",
    offset,
    problem: `${quoted(key)} stands twice in one mapping`,
    given: quoted(key),
    allowed: "each key once",
    todo: "take one of them out, or join them",
  };
}

export function unknownAlias(name: string, offset: number): YamlMistake {
  return {
    code: "yaml-syntax",
    offset,
    problem: "a text that begins with * repeats a part marked with &, and no part above has this mark",
    given: quoted(`*${name}`),
    allowed: "YAML 1.2",
    todo: "put the text into quotes",
  };
}

export function tagMistake(warning: YAMLError): YamlMistake {
  return {
    code: "unknown-tag",
    offset: warning.pos[0],
    problem: "a text that begins with ! marks a type, and this type is not known",
    given: quoted(warning.message.split("\n")[0] ?? ""),
    allowed: "plain values",
    todo: "take the mark out, or put the text into quotes",
  };
}

export function otherVersion(version: string): YamlMistake {
  return {
    code: "yaml-version",
    offset: 0,
    problem: "the file asks for another version of YAML",
    given: `%YAML ${quoted(version)}`,
    allowed: "YAML 1.2",
    todo: "take the %YAML line out",
  };
}

export function tooManyAliases(most: number): YamlMistake {
  return {
    code: "too-many-aliases",
    offset: 0,
    problem: "the file repeats its named parts too often",
    given: `parts marked with & that stand for more than ${most} others`,
    allowed: `up to ${most} repeats (*name) of parts marked with &name`,
    todo: "write the parts out",
  };
}

export function tooDeep(offset: number): YamlMistake {
  return {
    code: "nested-too-deeply",
    offset,
    problem: "the file is nested too deeply",
    given: "more than 40 levels",
    allowed: "a pipeline, whose parts lie at most 6 deep",
    todo: "check the brackets and the indentation",
  };
}
