/** A pipeline file as YAML: its data, and the place of every key and value. */
import {
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
  type YAMLMap,
} from "yaml";
import type { Path } from "./explain.ts";
import {
  duplicateKey,
  MOST_TOLD,
  otherVersion,
  tagMistake,
  tooDeep,
  tooManyAliases,
  unknownAlias,
  type YamlMistake,
  yamlMistakes,
} from "./yaml-mistakes.ts";

/** 1-based. */
export interface Place {
  readonly line: number;
  readonly column: number;
}

export interface PipelineDocument {
  /** Plain objects, lists and scalars; keys are own properties, whatever their name. */
  readonly data: unknown;
  readonly mistakes: readonly (YamlMistake & Place)[];
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
  const placed = (mistake: YamlMistake) => ({ ...mistake, ...placeOf(mistake.offset) });
  const unusable = (mistakes: readonly YamlMistake[]): PipelineDocument => ({
    data: undefined,
    mistakes: mistakes.map(placed),
    usable: false,
    keysAt: () => [],
    at: () => placeOf(0),
    atKey: () => placeOf(0),
  });
  const deep = tooDeepAt(text, lines);
  if (deep !== null) return unusable([tooDeep(deep)]);
  const document = parseDocument(text, {
    version: "1.2",
    schema: "core",
    strict: true,
    // Looked for here, by a set: the reader's own search takes time by the square of the number of keys.
    uniqueKeys: false,
    stringKeys: true,
    prettyErrors: false,
    logLevel: "error",
  });
  if (document.errors.length > 0) return unusable(yamlMistakes(document, text));
  const { duplicates, nameless, pairs } = inspect(document);
  if (nameless !== null) return unusable([nameless]);
  let data: unknown;
  try {
    data = document.toJS({ maxAliasCount: MOST_ALIASES });
  } catch (error) {
    if (error instanceof ReferenceError) return unusable([tooManyAliases(MOST_ALIASES)]);
    throw error;
  }
  const version = document.directives?.yaml;
  const mistakes = [
    ...duplicates,
    ...document.warnings.map(tagMistake),
    ...(version?.explicit === true && version.version !== "1.2" ? [otherVersion(version.version)] : []),
  ];
  const find = (path: Path) => findNode(document, pairs, path);
  return {
    data,
    mistakes: mistakes.map(placed),
    usable: true,
    keysAt: (path) => {
      const { node } = find(path);
      return isMap(node) ? [...pairs.get(node)!.keys()] : [];
    },
    at: (path) => {
      const { node, pair } = find(path);
      const block = isCollection(node) && node.flow !== true;
      const empty = !isNode(node) || (isScalar(node) && node.source === "");
      return placeOf(startOf((block || empty) && isNode(pair?.key) ? pair.key : node));
    },
    atKey: (path) => {
      const { node, pair } = find(path);
      return placeOf(startOf(isNode(pair?.key) ? pair.key : node));
    },
  };
}

/** Offset where the file gets too deep for a pipeline; found without recursion, which would overflow. */
function tooDeepAt(text: string, lines: LineCounter): number | null {
  const parser = new Parser(lines.addNewLine);
  lines.addNewLine(0);
  let deep: number | null = null;
  for (const lexeme of new Lexer().lex(text)) {
    // Read to the end for the sake of the line starts; the tokens themselves are of no interest here.
    for (const _ of parser.next(lexeme));
    if (parser.stack.length > MOST_OPEN) {
      deep = parser.offset;
      break;
    }
  }
  return deep;
}

type Pairs = ReadonlyMap<YAMLMap, ReadonlyMap<string, Pair>>;

/** One walk over the file: which keys stand twice, which aliases stand for nothing, and every pair by its key. */
function inspect(document: Document.Parsed): {
  duplicates: YamlMistake[];
  nameless: YamlMistake | null;
  pairs: Pairs;
} {
  const duplicates: YamlMistake[] = [];
  let nameless: YamlMistake | null = null;
  const names = new Set<string>();
  const pairs = new Map<YAMLMap, Map<string, Pair>>();
  visit(document, {
    Node: (_key, node) => {
      if (isAlias(node) && !names.has(node.source)) {
        nameless ??= unknownAlias(node.source, startOf(node));
        return visit.BREAK;
      }
      if (!isAlias(node) && node.anchor !== undefined) names.add(node.anchor);
      return undefined;
    },
    Map: (_key, map) => {
      if (map.anchor !== undefined) names.add(map.anchor);
      const byKey = new Map<string, Pair>();
      for (const pair of map.items) {
        const key = isScalar(pair.key) ? String(pair.key.value) : "";
        if (byKey.has(key) && duplicates.length < MOST_TOLD)
          duplicates.push(duplicateKey(key, startOf(pair.key)));
        // Of a key that stands twice the last one counts, as it does in the data.
        byKey.set(key, pair);
      }
      pairs.set(map, byKey);
    },
  });
  return { duplicates, nameless, pairs };
}

interface Found {
  readonly node: unknown;
  /** The pair whose value the node is; undefined in lists and at the top. */
  readonly pair: Pair | undefined;
}

/** The node at a path, or the nearest parent that exists. */
function findNode(document: Document.Parsed, pairs: Pairs, path: Path): Found {
  let found: Found = { node: document.contents, pair: undefined };
  for (const step of path) {
    const inside = isAlias(found.node) ? found.node.resolve(document) : found.node;
    let next: Found | undefined;
    if (isMap(inside)) {
      const pair = pairs.get(inside)?.get(String(step));
      if (pair !== undefined) next = { node: pair.value, pair };
    } else if (isSeq(inside) && isNode(inside.items[Number(step)]))
      next = { node: inside.items[Number(step)], pair: undefined };
    if (next === undefined) break;
    found = next;
  }
  return found;
}

const startOf = (node: unknown): number => (isNode(node) ? ((node as Node).range?.[0] ?? 0) : 0);
