/** A pipeline file as YAML: its data, and the place of every key and value. */
import {
  type Alias,
  type Document,
  isAlias,
  isCollection,
  isMap,
  isNode,
  isScalar,
  isSeq,
  Lexer,
  LineCounter,
  type Node,
  type Pair,
  Parser,
  parseDocument,
  visit,
  type YAMLError,
} from "yaml";
import { quoted } from "../diagnostics.ts";
import type { Path } from "./explain.ts";

/** 1-based. */
export interface Place {
  readonly line: number;
  readonly column: number;
}

/** A mistake in the YAML itself. */
export interface YamlMistake {
  readonly code: string;
  readonly place: Place;
  readonly problem: string;
  readonly given?: string;
  readonly allowed: string;
  readonly todo: string;
}

export interface PipelineDocument {
  /** Plain objects, lists and scalars; keys are own properties, whatever their name. */
  readonly data: unknown;
  readonly mistakes: readonly YamlMistake[];
  /** Whether the mistakes leave the data worth looking at. */
  readonly usable: boolean;
  /** Keys of the mapping at a path in the order of the file, which a plain object does not keep. */
  keysAt(path: Path): string[];
  /** Place of the value at a path (a block stands at its key); of the nearest parent when there is none. */
  at(path: Path): Place;
  /** Place of the key at a path; of the value where it has none. */
  atKey(path: Path): Place;
}

/** Tokens open at one time; a pipeline file has about 20. */
const MOST_OPEN = 100;
/** Aliases repeat what stands once; more than this is an attack on memory, not a pipeline. */
const MOST_ALIASES = 100;

export function readDocument(text: string): PipelineDocument {
  const lines = new LineCounter();
  const placeOf = (offset: number): Place => {
    const { line, col } = lines.linePos(offset);
    return { line: Math.max(1, line), column: Math.max(1, col) };
  };
  const unusable = (mistake: YamlMistake): PipelineDocument => ({
    data: undefined,
    mistakes: [mistake],
    usable: false,
    keysAt: () => [],
    at: () => mistake.place,
    atKey: () => mistake.place,
  });
  const deep = tooDeepAt(text);
  if (deep !== null) {
    for (let start = 0; start >= 0 && start <= deep; start = text.indexOf("\n", start) + 1 || -1)
      lines.addNewLine(start);
    return unusable(tooDeep(placeOf(deep)));
  }
  let document: Document.Parsed;
  let data: unknown;
  try {
    document = parseDocument(text, {
      lineCounter: lines,
      version: "1.2",
      schema: "core",
      strict: true,
      uniqueKeys: true,
      stringKeys: true,
      prettyErrors: false,
      logLevel: "error",
    });
    const nameless = namelessAlias(document);
    if (nameless !== null) return unusable(unknownAlias(nameless.source, placeOf(startOf(nameless))));
    data = document.errors.every(isDuplicateKey) ? document.toJS({ maxAliasCount: MOST_ALIASES }) : undefined;
  } catch (error) {
    if (error instanceof ReferenceError) return unusable(tooManyAliases(placeOf(0)));
    throw error;
  }
  const version = document.directives?.yaml;
  const mistakes = [
    ...yamlMistakes(document, text, placeOf),
    ...document.warnings.map((w) => tagMistake(w, placeOf(w.pos[0]))),
    ...(version?.explicit === true && version.version !== "1.2" ? [otherVersion(version.version)] : []),
  ];
  return {
    data,
    mistakes,
    usable: data !== undefined,
    keysAt: (path) => {
      const { node } = find(document, path);
      return isMap(node) ? node.items.map(keyText) : [];
    },
    at: (path) => {
      const { node, pair } = find(document, path);
      const key = pair?.key;
      const block = isCollection(node) && node.flow !== true;
      const empty = !isNode(node) || (isScalar(node) && node.source === "");
      return placeOf(startOf((block || empty) && isNode(key) ? key : node));
    },
    atKey: (path) => {
      const { node, pair } = find(document, path);
      return placeOf(startOf(isNode(pair?.key) ? pair.key : node));
    },
  };
}

interface Found {
  readonly node: unknown;
  /** The pair whose value the node is; undefined in lists and at the top. */
  readonly pair: Pair | undefined;
}

/** The node at a path, or the nearest parent that exists. */
function find(document: Document.Parsed, path: Path): Found {
  let found: Found = { node: document.contents, pair: undefined };
  for (const step of path) {
    const inside = isAlias(found.node) ? found.node.resolve(document) : found.node;
    let next: Found | undefined;
    if (isMap(inside)) {
      // Of a key that stands twice, the last one counts, as it does in the data.
      const pair = inside.items.findLast((p) => keyText(p) === String(step));
      if (pair !== undefined) next = { node: pair.value, pair };
    } else if (isSeq(inside) && isNode(inside.items[Number(step)]))
      next = { node: inside.items[Number(step)], pair: undefined };
    if (next === undefined) break;
    found = next;
  }
  return found;
}

const keyText = (pair: Pair): string => (isScalar(pair.key) ? String(pair.key.value) : "");

const startOf = (node: unknown): number => (isNode(node) ? ((node as Node).range?.[0] ?? 0) : 0);

const isDuplicateKey = (error: YAMLError): boolean => error.code === "DUPLICATE_KEY";

/** What went wrong, for the commonest codes of the YAML reader; the others keep its own words. */
const YAML_WORDS: Partial<Record<YAMLError["code"], readonly [problem: string, todo: string]>> = {
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

function yamlMistake(error: YAMLError, place: Place, text: string): YamlMistake {
  if (error.code === "MULTIPLE_DOCS")
    return {
      code: "several-documents",
      place,
      problem: "the file holds more than one document",
      given: "a line --- or ... with more below it",
      allowed: "one pipeline a file",
      todo: "put each pipeline into a file of its own",
    };
  const line = quoted((text.split(/\r?\n/, place.line)[place.line - 1] ?? "").trim());
  if (isDuplicateKey(error))
    return {
      code: "duplicate-key",
      place,
      problem: "the same key stands twice in one mapping",
      given: line,
      allowed: "each key once",
      todo: "take one of them out, or join them",
    };
  const [problem, todo] = YAML_WORDS[error.code] ?? [
    `this is not YAML: ${quoted(error.message.split("\n")[0] ?? "")}`,
    "put texts with special signs into quotes, and look at the line before too",
  ];
  return { code: "yaml-syntax", place, problem, given: line, allowed: "YAML 1.2", todo };
}

/** Offset where the file gets too deep for a pipeline; found without recursion, which would overflow. */
function tooDeepAt(text: string): number | null {
  const parser = new Parser();
  for (const lexeme of new Lexer().lex(text)) {
    // The tokens are of no interest here, only how many of them are open.
    for (const _ of parser.next(lexeme));
    if (parser.stack.length > MOST_OPEN) return parser.offset;
  }
  return null;
}

/** The mistakes up to the first that breaks the structure; what the reader says after that is of its making. */
function yamlMistakes(
  document: Document.Parsed,
  text: string,
  placeOf: (offset: number) => Place,
): YamlMistake[] {
  const broken = document.errors.findIndex((e) => e.code === "BAD_INDENT" || e.code === "MISSING_CHAR");
  const mistakes = document.errors
    .slice(0, broken < 0 ? undefined : broken + 1)
    .map((e) => yamlMistake(e, placeOf(e.pos[0]), text));
  const bracket = broken < 0 ? null : unclosedBracket(document, text);
  if (bracket !== null) mistakes[broken] = { ...unclosed(text[bracket]!), place: placeOf(bracket) };
  return mistakes;
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

function unclosed(bracket: string): Omit<YamlMistake, "place"> {
  return {
    code: "yaml-syntax",
    problem: "this bracket is not closed",
    given: bracket,
    allowed: "YAML 1.2",
    todo: `add ${bracket === "[" ? "]" : "}"} where it ends`,
  };
}

/** The first alias that stands for no part above it. */
function namelessAlias(document: Document.Parsed): Alias | null {
  const names = new Set<string>();
  let nameless: Alias | null = null;
  visit(document, {
    Node: (_key, node) => {
      if (isAlias(node)) {
        if (names.has(node.source)) return undefined;
        nameless = node;
        return visit.BREAK;
      }
      if (node.anchor !== undefined) names.add(node.anchor);
      return undefined;
    },
  });
  return nameless;
}

function unknownAlias(name: string, place: Place): YamlMistake {
  return {
    code: "yaml-syntax",
    place,
    problem: "a text that begins with * repeats a part marked with &, and no part above has this mark",
    given: quoted(`*${name}`),
    allowed: "YAML 1.2",
    todo: "put the text into quotes",
  };
}

function tagMistake(warning: YAMLError, place: Place): YamlMistake {
  return {
    code: "unknown-tag",
    place,
    problem: "a text that begins with ! marks a type, and this type is not known",
    given: quoted(warning.message.split("\n")[0] ?? ""),
    allowed: "plain values",
    todo: "take the mark out, or put the text into quotes",
  };
}

function otherVersion(version: string): YamlMistake {
  return {
    code: "yaml-version",
    place: { line: 1, column: 1 },
    problem: "the file asks for another version of YAML",
    given: `%YAML ${quoted(version)}`,
    allowed: "YAML 1.2",
    todo: "take the %YAML line out",
  };
}

function tooManyAliases(place: Place): YamlMistake {
  return {
    code: "too-many-aliases",
    place,
    problem: "the file repeats its named parts too often",
    allowed: `about ${MOST_ALIASES} repeats (*name) of parts marked with &name`,
    todo: "write the parts out",
  };
}

function tooDeep(place: Place): YamlMistake {
  return {
    code: "nested-too-deeply",
    place,
    problem: "the file is nested too deeply",
    allowed: "a pipeline, whose parts lie at most 6 deep",
    todo: "check the brackets",
  };
}
