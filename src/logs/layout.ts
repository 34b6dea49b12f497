import { parse } from "csv-parse/sync";
import { logProblems } from "./log-problems.ts";
import type { ReadRequest } from "./rows.ts";

/** Which columns of a log are asked for, by place. */
export interface Columns {
  /** Names of the columns, trimmed; nameless columns at the end are left out. */
  readonly names: readonly string[];
  /** Cells in the names line, nameless ones included. */
  readonly namesCells: number;
  readonly timeIndexes: readonly number[];
  readonly channelIndexes: readonly number[];
}

/** The line of column names, and how it is cut into cells. */
export interface NamesLine {
  readonly separator: string;
  readonly cells: readonly string[];
  /** Physical line on which it begins, and the one that follows it. */
  readonly line: number;
  readonly after: number;
}

/** Lines among which the column names are looked for. */
const PREAMBLE_LINES = 200;
/** Lines that a quoted name with line breaks in it may take. */
const NAMES_LINES = 20;

export function timeColumns(request: ReadRequest): readonly string[] {
  const { column } = request.time;
  return typeof column === "string" ? [column] : column;
}

/**
 * Finds the line of column names: the first one that has all the columns asked for; where no line has them all,
 * the one that comes nearest, so that a diagnostic can show its names.
 * @param lines  decoded physical lines from the start of the file
 * @throws LogProblem when nothing looks like names
 */
export function findNames(name: string, lines: readonly string[], request: ReadRequest): NamesLine {
  const { layout, channels } = request;
  const times = timeColumns(request);
  const wanted = [...times, ...channels.map((c) => c.column)];
  const separators = layout.separator === undefined ? [",", ";", "\t"] : [layout.separator];
  const from = layout.namesLine === undefined ? 0 : layout.namesLine - 1;
  const until = layout.namesLine === undefined ? Math.min(lines.length, PREAMBLE_LINES) : layout.namesLine;
  let best: NamesLine | undefined;
  let bestScore = -1;
  for (let i = from; i < until && i < lines.length; i++) {
    const line = lines[i]!.trimStart();
    if (line === "") continue;
    // Some loggers write their names as the last line of a commented preamble.
    const commented = layout.namesLine === undefined && line.startsWith("#");
    for (const separator of separators) {
      const record = commented
        ? recordOf([line.replace(/^#+\s*/, "")], separator)
        : recordOf(lines.slice(i, i + NAMES_LINES), separator);
      if (record === null) continue;
      const { cells } = record;
      const hits = wanted.filter((column) => cells.includes(column)).length;
      const names = { separator, cells, line: i + 1, after: i + 1 + record.lines };
      if (hits === wanted.length) return names;
      if (commented) continue;
      const timeHits = times.filter((column) => cells.includes(column)).length;
      const score = timeHits * 1e6 + hits * 1e4 + Math.min(cells.length, 9999);
      if (score > bestScore) {
        best = names;
        bestScore = score;
      }
    }
  }
  if (best === undefined) throw logProblems.noTimeColumn(name, times[0]!, [], 0);
  return best;
}

/** Cuts the record that begins on the first of the lines; null when it cannot be cut. */
function recordOf(lines: readonly string[], separator: string): { cells: string[]; lines: number } | null {
  const text = lines[0]!.includes('"') ? lines.join("\n") : lines[0]!;
  try {
    const cells = parse(`${text}\n`, {
      delimiter: separator,
      record_delimiter: ["\n"],
      relax_quotes: true,
      relax_column_count: true,
      trim: true,
      to: 1,
    })[0];
    if (cells === undefined) return null;
    const breaks = cells.reduce((sum, cell) => sum + cell.split("\n").length - 1, 0);
    return { cells: cells.map((cell) => cell.trim()), lines: breaks + 1 };
  } catch {
    return null;
  }
}

/**
 * Finds the columns asked for among the names.
 * @throws LogProblem when one is missing, or stands there twice
 */
export function findColumns(name: string, line: NamesLine, request: ReadRequest): Columns {
  const names = named(line.cells);
  const index = (column: string): number => {
    const at = names.indexOf(column);
    if (at >= 0 && names.indexOf(column, at + 1) >= 0) throw logProblems.columnTwice(name, column, line.line);
    return at;
  };
  const timeIndexes = timeColumns(request).map((column) => {
    const at = index(column);
    if (at < 0) throw logProblems.noTimeColumn(name, column, names, line.line);
    return at;
  });
  const channelIndexes = request.channels.map(({ column }) => {
    const at = index(column);
    if (at < 0) throw logProblems.noChannelColumn(name, column, names, line.line);
    return at;
  });
  return { names, namesCells: line.cells.length, timeIndexes, channelIndexes };
}

/** The names without the nameless columns at the end. */
function named(cells: readonly string[]): readonly string[] {
  let last = cells.length;
  while (last > 1 && cells[last - 1] === "") last--;
  return cells.slice(0, last);
}

/** The time of a row, put together from its columns; undefined where the row is too short. */
export function timeText(cells: readonly string[], indexes: readonly number[]): string | undefined {
  if (indexes.length === 1) return cells[indexes[0]!];
  if (indexes.some((i) => i >= cells.length)) return undefined;
  return indexes
    .map((i) => cells[i])
    .join(" ")
    .trim();
}

/** Whether a row has as many cells as the names say; empty nameless cells at its end do not count. */
export function cellCountHolds(cells: readonly string[], { names, namesCells }: Columns): boolean {
  if (cells.length === namesCells) return true;
  if (cells.length < names.length) return false;
  for (let i = names.length; i < cells.length; i++) if (cells[i] !== "") return false;
  return true;
}
