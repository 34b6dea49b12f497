import type { Cells } from "./cells.ts";
import type { Columns } from "./layout.ts";

/**
 * Whether the last line of a log, which has all its cells but no line end, is certain to be whole. A number that
 * was cut off reads as a shorter number, so it is taken only when it cannot have gone on: its quote closes, the
 * last cell is not asked for, a time ends in its offset, or every row before has the same number of decimals.
 */
export function lastCellIsWhole(
  cells: readonly string[],
  quoteCloses: boolean,
  before: readonly Cells[],
  columns: Columns,
): boolean {
  const at = cells.length - 1;
  const cell = cells[at]!;
  if (quoteCloses) return true;
  if (columns.timeIndexes.includes(at)) return /(?:[Zz]|[+-]\d\d:\d\d)$/.test(cell);
  if (!columns.channelIndexes.includes(at)) return true;
  const decimals = decimalsOf(cell);
  if (decimals < 1 || before.length < LEAST_ROWS) return false;
  return before.every((row) => row !== null && decimalsOf(row[at] ?? "") === decimals);
}

const LEAST_ROWS = 3;

function decimalsOf(cell: string): number {
  const match = /^[+-]?\d+[.,](\d+)$/.exec(cell);
  return match === null ? 0 : match[1]!.length;
}
