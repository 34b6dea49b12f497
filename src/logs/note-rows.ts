import { type Columns, timeText } from "./layout.ts";
import type { MissingCodes } from "./missing-codes.ts";
import { readNumber } from "./number-cell.ts";
import type { TimeReader } from "./time-reader.ts";

/** Rows that may stand between the names and the data: units, and how each value was formed. */
const MOST_NOTE_ROWS = 3;

export interface SampleRow {
  readonly line: number;
  readonly cells: readonly string[];
}

/**
 * How many rows right below the names are notes about the columns (units, kind of mean) and not data: neither
 * their time nor any of their values can be read, and words stand in place of values.
 */
export function countNoteRows(
  rows: readonly SampleRow[],
  columns: Columns,
  times: TimeReader,
  missing: MissingCodes,
): number {
  let count = 0;
  for (const { cells } of rows) {
    if (count === MOST_NOTE_ROWS || !isNote(cells, columns, times, missing)) break;
    count++;
  }
  return count === rows.length ? 0 : count;
}

function isNote(
  cells: readonly string[],
  columns: Columns,
  times: TimeReader,
  missing: MissingCodes,
): boolean {
  const { names, timeIndexes, channelIndexes } = columns;
  if (cells.length < names.length) return false;
  if (names.every((name, i) => cells[i] === name)) return false;
  if (!Number.isNaN(times.time(timeText(cells, timeIndexes) ?? ""))) return false;
  const values = channelIndexes.map((c) => cells[c] ?? "");
  // A number in any spelling, or with a unit behind it, is data whose time is damaged.
  if (values.some((cell) => /\d/.test(cell) || !Number.isNaN(readNumber(cell, ".")))) return false;
  return values.some((cell) => cell !== "" && !missing.isWord(cell));
}
