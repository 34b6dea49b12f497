import type { Cells } from "./cells.ts";
import { ClockGate } from "./clock-gate.ts";
import { type Columns, cellCountHolds, timeText } from "./layout.ts";
import { MissingCodes } from "./missing-codes.ts";
import { NumberReader } from "./number-format.ts";
import { type ProbedLog, timeReader } from "./probe.ts";
import type { ReorderBuffer } from "./reorder-buffer.ts";
import { noteLine, setAside } from "./row-account.ts";
import type { ReadRequest, RowAccount } from "./rows.ts";
import { SuspectCodes } from "./suspect-codes.ts";
import type { TimeReader } from "./time-reader.ts";

export interface Tally {
  count: number;
  readonly firstLines: number[];
}

/** Reads records as rows: time and values, or a reason to set the row aside. */
export class RowReader {
  readonly times: TimeReader;
  readonly comments: Tally = { count: 0, firstLines: [] };
  readonly backwardSteps: Tally = { count: 0, firstLines: [] };
  readonly newNames: Tally = { count: 0, firstLines: [] };
  readonly suspects: readonly SuspectCodes[];
  private columns: Columns | null;
  private readonly originalNames: readonly string[];
  private readonly timeNames: readonly string[];
  private readonly channelNames: readonly string[];
  private readonly missing: MissingCodes;
  private readonly numbers: NumberReader;
  private readonly gate: ClockGate;
  private readonly account: RowAccount;
  private readonly values: Float64Array;
  private readonly clockSetLine: number;
  private previous_us = Number.NEGATIVE_INFINITY;

  constructor(log: ProbedLog, request: ReadRequest, account: RowAccount, buffer: ReorderBuffer) {
    this.times = timeReader(log.file.name, log.form, request);
    this.columns = log.columns;
    this.clockSetLine = log.clockSetLine;
    this.originalNames = log.columns.names;
    this.timeNames = log.columns.timeIndexes.map((i) => log.columns.names[i]!);
    this.channelNames = log.columns.channelIndexes.map((i) => log.columns.names[i]!);
    this.missing = new MissingCodes(request.missing);
    this.numbers = new NumberReader(log.numbers);
    this.account = account;
    this.values = new Float64Array(request.channels.length);
    this.suspects = request.channels.map(() => new SuspectCodes());
    this.gate = new ClockGate(request.lateBy_us, {
      pass: (time, line, values) => buffer.add(time, line, values),
      setAside: (reason, line) => setAside(account, reason, line),
    });
  }

  /** Cells in the order of the columns in force; null where the columns are not known. */
  get columnsInForce(): Columns | null {
    return this.columns;
  }

  /** @param cut  the record lacks its line end and may have been cut off */
  row(cells: Cells, line: number, cut: boolean): void {
    const { account, columns } = this;
    if (cells?.[0]?.startsWith("#") && !this.holdsTime(cells)) {
      noteLine(this.comments, line);
      return;
    }
    account.read++;
    if (cut) setAside(account, "cut-short", line);
    else if (cells === null) setAside(account, "unreadable-quotes", line);
    else if (columns !== null && cellCountHolds(cells, columns)) {
      const time = this.times.time(timeText(cells, columns.timeIndexes)!);
      if (!Number.isNaN(time)) this.reading(time, cells, columns, line);
      else if (!this.namesAgain(cells, line)) setAside(account, this.times.problem, line);
    } else if (!this.namesAgain(cells, line))
      setAside(account, columns === null ? "unknown-columns" : "ragged", line);
  }

  end(): void {
    this.gate.end();
  }

  private holdsTime(cells: readonly string[]): boolean {
    const { columns } = this;
    return (
      columns !== null &&
      cellCountHolds(cells, columns) &&
      /\d/.test(timeText(cells, columns.timeIndexes) ?? "")
    );
  }

  /**
   * A logger that was started again writes its names again. If they have changed, the columns are found anew by
   * name; if one that is asked for is gone, the rows below are set aside until it comes back.
   */
  private namesAgain(cells: readonly string[], line: number): boolean {
    if (!this.timeNames.every((name) => cells.includes(name))) return false;
    const { account, originalNames } = this;
    let namesCells = cells.length;
    while (namesCells > 1 && cells[namesCells - 1] === "") namesCells--;
    const names = cells.slice(0, namesCells);
    const index = (name: string): number =>
      names.indexOf(name) === names.lastIndexOf(name) ? names.indexOf(name) : -1;
    const timeIndexes = this.timeNames.map(index);
    const channelIndexes = this.channelNames.map(index);
    const complete = ![...timeIndexes, ...channelIndexes].includes(-1);
    const same = names.length === originalNames.length && names.every((name, i) => name === originalNames[i]);
    if (!same || this.columns === null) noteLine(this.newNames, line);
    this.columns = complete ? { names, namesCells: cells.length, timeIndexes, channelIndexes } : null;
    setAside(account, "repeated-names", line);
    return true;
  }

  private reading(time: number, cells: readonly string[], columns: Columns, line: number): void {
    const { account, values, missing, numbers } = this;
    const { channelIndexes } = columns;
    let unreadable = false;
    let kept = false;
    for (let c = 0; c < channelIndexes.length; c++) {
      const cell = cells[channelIndexes[c]!]!;
      const value = cell === "" ? Number.NaN : numbers.read(cell, c);
      if (Number.isNaN(value)) {
        values[c] = value;
        if (missing.isWord(cell) || missing.isNumber(numbers.plain(cell))) account.missingCells[c]!++;
        else {
          noteLine(account.unreadableCells[c]!, line);
          unreadable = true;
        }
      } else if (missing.isNumber(value)) {
        account.missingCells[c]!++;
        values[c] = Number.NaN;
      } else {
        values[c] = value;
        kept = true;
        const suspect = this.suspects[c]!.watch(value);
        if (suspect !== null) noteLine(suspect, line);
      }
    }
    if (time < this.previous_us) noteLine(this.backwardSteps, line);
    this.previous_us = time;
    if (unreadable && !kept) setAside(account, "no-readable-value", line);
    else if (line < this.clockSetLine) setAside(account, "stray-time", line);
    else this.gate.add(time, line, values);
  }
}
