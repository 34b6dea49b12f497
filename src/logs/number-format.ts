import { logProblems } from "./log-problems.ts";
import type { MissingCodes } from "./missing-codes.ts";
import { readNumber } from "./number-cell.ts";
import type { LogLayout } from "./rows.ts";

/** How the numbers of a log are written. */
export interface NumberFormat {
  readonly decimalSign: "." | ",";
  /** Sign between groups of three digits. */
  readonly thousandsSign: string | null;
  /** Unit that stands behind every number of a channel, or null. */
  readonly suffixes: readonly (string | null)[];
}

export interface SampleCell {
  readonly line: number;
  readonly cell: string;
}

/** Cells that a unit must stand in before it is taken for one. */
const LEAST_WITH_UNIT = 3;

/** Reads the number cells of a log. */
export class NumberReader {
  private readonly format: NumberFormat;
  private readonly grouped: RegExp | null;

  constructor(format: NumberFormat) {
    this.format = format;
    this.grouped =
      format.thousandsSign === null ? null : groupedNumber(format.thousandsSign, format.decimalSign);
  }

  /** The value of a cell of one channel; NaN when it is not a finite number as this log writes them. */
  read(cell: string, channel: number): number {
    const suffix = this.format.suffixes[channel];
    if (suffix != null) {
      if (!cell.endsWith(suffix)) return Number.NaN;
      return this.plain(cell.slice(0, cell.length - suffix.length).trimEnd());
    }
    return this.plain(cell);
  }

  /** The value of a cell without its unit. */
  plain(cell: string): number {
    const { decimalSign, thousandsSign } = this.format;
    const value = readNumber(cell, decimalSign);
    if (!Number.isNaN(value) || this.grouped === null || !this.grouped.test(cell)) return value;
    return readNumber(cell.replaceAll(thousandsSign!, ""), decimalSign);
  }
}

function groupedNumber(thousandsSign: string, decimalSign: string): RegExp {
  const group = `\\u{${thousandsSign.codePointAt(0)!.toString(16)}}`;
  return new RegExp(`^[+-]?[1-9]\\d{0,2}(?:${group}\\d{3})+(?:[${decimalSign}]\\d*)?$`, "u");
}

/**
 * Finds how numbers are written from a sample of the channels' cells.
 * @throws LogProblem when the meaning of a comma is not certain
 */
export function findNumberFormat(
  name: string,
  columns: readonly (readonly SampleCell[])[],
  layout: LogLayout,
  missing: MissingCodes,
): NumberFormat {
  const isMissing = (cell: string): boolean =>
    missing.isWord(cell) || missing.isNumber(readNumber(cell, "."));
  const suffixes = columns.map((cells) =>
    findSuffix(cells.map((c) => c.cell).filter((cell) => !isMissing(cell))),
  );
  const cells = columns.flatMap((column, c) =>
    column.map(({ line, cell }) => ({
      line,
      cell: suffixes[c] == null ? cell : cell.slice(0, -suffixes[c].length).trimEnd(),
    })),
  );
  const signs = findSigns(name, cells, layout);
  return { ...signs, suffixes };
}

/** A unit may hold digits (m3/s) only behind a blank: 0x1F and 1_000 are no numbers with units. */
const NUMBER_WITH_UNIT =
  /^[+-]?\d[\d.,]*(?:[eE][+-]?\d+)?(?:([^\s\d.,+\-eEdD][^\s\d]{0,11}|[eEdD][^\s\d]{1,11})|\s+([^\s\d.,+-]\S{0,11}))$/u;

function findSuffix(cells: readonly string[]): string | null {
  if (cells.length < LEAST_WITH_UNIT) return null;
  let suffix: string | null = null;
  for (const cell of cells) {
    const match = NUMBER_WITH_UNIT.exec(cell);
    const unit = match?.[1] ?? match?.[2];
    if (unit === undefined || (suffix !== null && unit !== suffix)) return null;
    suffix = unit;
  }
  return suffix;
}

type Signs = Pick<NumberFormat, "decimalSign" | "thousandsSign">;

/** What is certain of one sign being the decimal sign and the other one standing between thousands. */
interface Evidence {
  /** Cells with both signs, or with several groups. */
  strong: number;
  /** Cells that can be read in no other way. */
  weak: number;
  grouped: boolean;
}

function findSigns(name: string, cells: readonly SampleCell[], layout: LogLayout): Signs {
  const other = cells.find(({ cell }) =>
    /^[+-]?[1-9]\d{0,2}(?:['’\u00a0\u202f]\d{3})+(?:[.,]\d*)?$/u.test(cell),
  );
  const thousands =
    layout.thousandsSign ?? (other === undefined ? null : /['’\u00a0\u202f]/u.exec(other.cell)![0]);
  if (layout.decimalSign !== undefined) {
    const rest = layout.decimalSign === "." ? "," : ".";
    const grouped = cells.some(({ cell }) => groupedNumber(rest, layout.decimalSign!).test(cell));
    return { decimalSign: layout.decimalSign, thousandsSign: thousands ?? (grouped ? rest : null) };
  }
  if (thousands !== null && thousands !== "." && thousands !== ",")
    cells = cells.map(({ line, cell }) => ({ line, cell: cell.replaceAll(thousands, "") }));
  const point = evidence(cells, ".", ",");
  const comma = evidence(cells, ",", ".");
  const signs = (decimalSign: "." | ",", grouped: boolean): Signs => ({
    decimalSign,
    thousandsSign: thousands ?? (grouped ? (decimalSign === "." ? "," : ".") : null),
  });
  if (thousands === "," || (point.strong > 0 && comma.strong === 0)) return signs(".", point.grouped);
  if (thousands === "." || (comma.strong > 0 && point.strong === 0)) return signs(",", comma.grouped);
  if (point.strong === 0 && comma.strong === 0) {
    if (comma.weak === 0 && point.weak > 0) return signs(".", point.grouped);
    if (point.weak === 0 && comma.weak > 0) return signs(",", comma.grouped);
    if (point.weak === 0 && comma.weak === 0) {
      const doubtful = cells.find(({ cell }) => /^[+-]?[1-9]\d{0,2},\d{3}$/.test(cell));
      if (doubtful === undefined) return signs(".", false);
      throw logProblems.decimalSignUnclear(name, doubtful.cell, doubtful.line);
    }
  }
  const comma1 = cells.find(({ cell }) => cell.includes(","))!;
  throw logProblems.decimalSignUnclear(name, comma1.cell, comma1.line);
}

function evidence(cells: readonly SampleCell[], decimal: "." | ",", group: "." | ","): Evidence {
  const found: Evidence = { strong: 0, weak: 0, grouped: false };
  const mine = groupedNumber(group, decimal);
  const theirs = groupedNumber(decimal, group);
  for (const { cell } of cells) {
    if (!cell.includes(".") && !cell.includes(",")) continue;
    const grouped = mine.test(cell);
    if (grouped) found.grouped = true;
    const readable = grouped || !Number.isNaN(readNumber(cell, decimal));
    if (!readable || theirs.test(cell) || !Number.isNaN(readNumber(cell, group))) continue;
    if (grouped) found.strong++;
    else found.weak++;
  }
  return found;
}
