import { parse } from "csv-parse/sync";
import { logProblems } from "./log-problems.ts";
import type { MissingCodes } from "./missing-codes.ts";
import { readNumber } from "./number-cell.ts";
import type { ReadRequest } from "./rows.ts";
import type { TimeReader } from "./time-reader.ts";

/** Where things stand in one log. */
export interface FoundLayout {
  readonly separator: string;
  readonly decimalSign: "." | ",";
  /** Names of the columns, trimmed; nameless columns at the end are left out. */
  readonly names: readonly string[];
  /** Cells in the names line, nameless ones included. */
  readonly namesCells: number;
  readonly namesLine: number;
  readonly dataFromLine: number;
  readonly timeIndex: number;
  readonly channelIndexes: readonly number[];
  /** In plain words, for the account. */
  readonly found: Record<string, string>;
}

const SEPARATORS: Record<string, string> = { ",": "comma", ";": "semicolon", "\t": "tab", " ": "blank" };
/** Lines among which the column names are looked for. */
const PREAMBLE_LINES = 200;
/** Rows that may stand between the names and the data: units, and how each value was formed. */
const NOTE_ROWS = 3;
const ROWS_LOOKED_AT = 200;

interface NamesLine {
  readonly separator: string;
  readonly cells: readonly string[];
  readonly line: number;
  readonly after: number;
}

/**
 * Finds the layout of a log from its first lines and from what the pipeline says about it.
 * @param head  decoded text from the start of the file, whole lines
 * @throws LogProblem when the layout cannot be found, or not with certainty
 */
export function findLayout(
  name: string,
  head: string,
  request: ReadRequest,
  times: TimeReader,
  missing: MissingCodes,
): FoundLayout {
  const lines = head.split(/\r\n|\n|\r/);
  const names = findNames(name, lines, request);
  const trimmed = names.cells.slice(0, lastNamed(names.cells) + 1);
  const index = (column: string): number => {
    const at = trimmed.indexOf(column);
    if (at >= 0 && trimmed.indexOf(column, at + 1) >= 0)
      throw logProblems.columnTwice(name, column, names.line);
    return at;
  };
  const timeIndex = index(request.time.column);
  if (timeIndex < 0) throw logProblems.noTimeColumn(name, request.time.column, trimmed, names.line);
  const channelIndexes = request.channels.map(({ column }) => {
    const at = index(column);
    if (at < 0) throw logProblems.noChannelColumn(name, column, trimmed, names.line);
    return at;
  });
  const found: Record<string, string> = {
    separator: `${SEPARATORS[names.separator] ?? JSON.stringify(names.separator)}${request.layout.separator === undefined ? "" : ", as set in the pipeline"}`,
    "names line": `line ${names.line}`,
  };
  const rows = sampleRows(lines, names, request.layout.dataFromLine ?? names.after);
  const decimalSign = findDecimalSign(name, names.separator, rows, channelIndexes, request);
  found["decimal sign"] = decimalSign === "," ? "comma" : "point";
  let dataFromLine = request.layout.dataFromLine ?? names.after;
  if (request.layout.dataFromLine === undefined) {
    const notes = countNoteRows(rows, (cells) => {
      if (cells.length < trimmed.length || !Number.isNaN(times.time(cells[timeIndex] ?? ""))) return false;
      const values = channelIndexes.map((c) => cells[c] ?? "");
      if (values.some((cell) => !Number.isNaN(readNumber(cell, decimalSign)))) return false;
      return (
        values.some((cell) => cell !== "" && !missing.isWord(cell)) && cells.join() !== names.cells.join()
      );
    });
    if (notes.length > 0) {
      dataFromLine = notes.at(-1)!.line + 1;
      found["rows between names and data"] = `${notes.map((n) => n.line).join(", ")} (units or notes)`;
    }
  }
  return {
    separator: names.separator,
    decimalSign,
    names: trimmed,
    namesCells: names.cells.length,
    namesLine: names.line,
    dataFromLine,
    timeIndex,
    channelIndexes,
    found,
  };
}

interface SampleRow {
  readonly line: number;
  readonly cells: readonly string[];
}

/** The line of column names is the first one that has all the columns asked for. */
function findNames(name: string, lines: readonly string[], request: ReadRequest): NamesLine {
  const { layout, time, channels } = request;
  const wanted = [time.column, ...channels.map((c) => c.column)];
  const separators = layout.separator === undefined ? [",", ";", "\t"] : [layout.separator];
  const from = layout.namesLine === undefined ? 0 : layout.namesLine - 1;
  const until = layout.namesLine === undefined ? Math.min(lines.length, PREAMBLE_LINES) : layout.namesLine;
  let best: NamesLine | undefined;
  let bestScore = -1;
  for (let i = from; i < until && i < lines.length; i++) {
    const line = lines[i]!;
    if (line.trim() === "" || (layout.namesLine === undefined && line.trimStart().startsWith("#"))) continue;
    for (const separator of separators) {
      const record = recordAt(lines, i, separator);
      if (record === null) continue;
      const cells = record.cells.map((cell) => cell.trim());
      const hits = wanted.filter((column) => cells.includes(column)).length;
      const names = { separator, cells, line: i + 1, after: i + 1 + record.lines };
      if (hits === wanted.length && (hits > 1 || cells.length > 1 || separators.length === 1)) return names;
      // Where no line has all the names, the one with the time's name and the most of the others is meant.
      const score = (cells.includes(time.column) ? 1e6 : 0) + hits * 1e4 + Math.min(cells.length, 9999);
      if (score > bestScore) {
        best = names;
        bestScore = score;
      }
    }
  }
  if (best === undefined) throw logProblems.noTimeColumn(name, time.column, [], 0);
  return best;
}

function recordAt(
  lines: readonly string[],
  at: number,
  separator: string,
): { cells: readonly string[]; lines: number } | null {
  // A names line with quoted line breaks is rare; a few more lines are enough to close the quote.
  const whole = lines[at]!.includes('"') ? lines.slice(at, at + 20).join("\n") : lines[at]!;
  try {
    const records = parse(`${whole}\n`, {
      delimiter: separator,
      record_delimiter: ["\n"],
      relax_quotes: true,
      relax_column_count: true,
      trim: true,
      to: 1,
    });
    const cells = records[0];
    if (cells === undefined) return null;
    const breaks = cells.reduce((sum, cell) => sum + cell.split("\n").length - 1, 0);
    return { cells, lines: breaks + 1 };
  } catch {
    return null;
  }
}

function sampleRows(lines: readonly string[], names: NamesLine, fromLine: number): SampleRow[] {
  const rows: SampleRow[] = [];
  for (let i = fromLine - 1; i < lines.length && rows.length < ROWS_LOOKED_AT; ) {
    const line = lines[i]!;
    const record =
      line.trim() === "" || line.trimStart().startsWith("#") ? null : recordAt(lines, i, names.separator);
    if (record !== null) rows.push({ line: i + 1, cells: record.cells });
    i += record?.lines ?? 1;
  }
  return rows;
}

function countNoteRows(
  rows: readonly SampleRow[],
  isNote: (cells: readonly string[]) => boolean,
): SampleRow[] {
  const notes: SampleRow[] = [];
  for (const row of rows) {
    if (notes.length === NOTE_ROWS || !isNote(row.cells)) break;
    notes.push(row);
  }
  return notes.length === rows.length ? [] : notes;
}

/** A decimal comma is certain when a cell can be nothing else; "1,234" could be one thousand. */
function findDecimalSign(
  name: string,
  separator: string,
  rows: readonly SampleRow[],
  channelIndexes: readonly number[],
  request: ReadRequest,
): "." | "," {
  if (request.layout.decimalSign !== undefined) return request.layout.decimalSign;
  if (separator === ",") return ".";
  let certain = false;
  let doubtful: { cell: string; line: number } | undefined;
  let points = false;
  for (const row of rows)
    for (const c of channelIndexes) {
      const cell = row.cells[c] ?? "";
      if (/^[+-]?\d*\.\d+([eE][+-]?\d+)?$/.test(cell)) points = true;
      else if (/^[+-]?[1-9]\d{0,2},\d{3}$/.test(cell)) doubtful ??= { cell, line: row.line };
      else if (/^[+-]?\d*,\d+([eE][+-]?\d+)?$/.test(cell)) {
        certain = true;
        doubtful ??= { cell, line: row.line };
      }
    }
  if (doubtful === undefined) return ".";
  if (certain && !points) return ",";
  throw logProblems.decimalSignUnclear(name, doubtful.cell, doubtful.line);
}

function lastNamed(cells: readonly string[]): number {
  let last = cells.length - 1;
  while (last > 0 && cells[last] === "") last--;
  return last;
}
