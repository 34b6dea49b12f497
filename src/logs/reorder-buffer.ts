import { noteLine, setAside } from "./row-account.ts";
import type { RowAccount } from "./rows.ts";

/** Rows of one log in strict order of time, as columns, with the physical line of each. */
export interface SortedRows {
  readonly count: number;
  readonly times: Float64Array;
  readonly columns: readonly Float64Array[];
  readonly lines: Float64Array;
  /** 1 where the row came late and was put in its place. */
  readonly moved: Uint8Array;
}

const LEAST_ROWS = 8_192;

/**
 * Holds the rows of the last `lateBy_us` microseconds of a log until no row can come before them any more.
 * Rows of equal time become one: what repeats it or fills its missing cells is merged, what contradicts it is
 * set aside. Memory is bounded by the horizon; sorting takes n log n however disordered the rows are.
 */
export class ReorderBuffer {
  private readonly channels: number;
  private readonly lateBy_us: number;
  private readonly account: RowAccount;
  /** Empty until the first row comes and after the last one has gone: a series may have thousands of logs. */
  private times: Float64Array = new Float64Array(0);
  private lines: Float64Array = new Float64Array(0);
  private moved = new Uint8Array(0);
  private columns: Float64Array[];
  private count = 0;
  private held = 0;
  private newest_us = Number.NEGATIVE_INFINITY;
  private inOrder = true;

  constructor(channels: number, lateBy_us: number, account: RowAccount) {
    this.channels = channels;
    this.lateBy_us = lateBy_us;
    this.account = account;
    this.columns = Array.from({ length: channels }, () => new Float64Array(0));
  }

  /** @param time  not more than `lateBy_us` behind the newest one */
  add(time: number, line: number, values: Float64Array): void {
    if (this.count === this.times.length) this.grow();
    const at = this.count++;
    this.times[at] = time;
    this.lines[at] = line;
    this.moved[at] = time < this.newest_us ? 1 : 0;
    for (let c = 0; c < this.channels; c++) this.columns[c]![at] = values[c]!;
    if (time <= this.newest_us) this.inOrder = false;
    else this.newest_us = time;
  }

  /** The rows that are settled, if they are many enough to be worth moving the others; all of them at the end. */
  drain(final: boolean): SortedRows | null {
    if (this.count === 0 || (!final && this.count < 2 * this.held + LEAST_ROWS)) return null;
    this.sort();
    const settled = final
      ? this.count
      : firstAtOrAfter(this.times, 0, this.count, this.newest_us - this.lateBy_us);
    const rows = this.resolve(settled);
    this.drop(settled);
    if (final) this.resize(0);
    return rows.count === 0 ? null : rows;
  }

  private grow(): void {
    this.resize(Math.max(2 * LEAST_ROWS, 2 * this.times.length));
  }

  private resize(length: number): void {
    const resized = (from: Float64Array): Float64Array => {
      const to = new Float64Array(length);
      to.set(from.subarray(0, length));
      return to;
    };
    this.times = resized(this.times);
    this.lines = resized(this.lines);
    this.columns = this.columns.map(resized);
    const moved = new Uint8Array(length);
    moved.set(this.moved.subarray(0, length));
    this.moved = moved;
  }

  /** By time; rows of equal time stay in the order in which they were read. */
  private sort(): void {
    if (this.inOrder) return;
    const { times, count } = this;
    const order = Uint32Array.from({ length: count }, (_, i) => i);
    order.sort((a, b) => times[a]! - times[b]! || a - b);
    const inOrder = (from: Float64Array): void => {
      const copy = from.slice(0, count);
      for (let i = 0; i < count; i++) from[i] = copy[order[i]!]!;
    };
    inOrder(this.lines);
    for (const column of this.columns) inOrder(column);
    const moved = this.moved.slice(0, count);
    for (let i = 0; i < count; i++) this.moved[i] = moved[order[i]!]!;
    inOrder(times);
  }

  /** Copies the first `settled` rows out, one row for each time. */
  private resolve(settled: number): SortedRows {
    const times = this.times.slice(0, settled);
    const lines = this.lines.slice(0, settled);
    const moved = this.moved.slice(0, settled);
    const columns = this.columns.map((column) => column.slice(0, settled));
    if (this.inOrder) return { count: settled, times, lines, moved, columns };
    let count = 0;
    for (let i = 0; i < settled; i++) {
      if (count > 0 && times[i] === times[count - 1]) {
        absorb(columns, count - 1, columns, i, lines[i]!, this.account);
        continue;
      }
      if (count !== i) {
        times[count] = times[i]!;
        lines[count] = lines[i]!;
        moved[count] = moved[i]!;
        for (const column of columns) column[count] = column[i]!;
      }
      count++;
    }
    return { count, times, lines, moved, columns };
  }

  private drop(settled: number): void {
    const { count } = this;
    this.times.copyWithin(0, settled, count);
    this.lines.copyWithin(0, settled, count);
    this.moved.copyWithin(0, settled, count);
    for (const column of this.columns) column.copyWithin(0, settled, count);
    this.count = count - settled;
    this.held = this.count;
    this.inOrder = true;
    for (let i = 1; i < this.count && this.inOrder; i++)
      if (this.times[i]! <= this.times[i - 1]!) this.inOrder = false;
  }
}

/** First index in [from, to) of an ascending array whose value is not less than `value`; `to` if there is none. */
export function firstAtOrAfter(ascending: Float64Array, from: number, to: number, value: number): number {
  let low = from;
  let high = to;
  while (low < high) {
    const middle = (low + high) >>> 1;
    if (ascending[middle]! < value) low = middle + 1;
    else high = middle;
  }
  return low;
}

/**
 * Row `j` has the time of row `i`, which was read first and stays: if no cell contradicts it, `j` is merged
 * into it (its values fill missing cells); otherwise `j` is set aside whole.
 */
export function absorb(
  kept: readonly Float64Array[],
  i: number,
  other: readonly Float64Array[],
  j: number,
  line: number,
  account: RowAccount,
): void {
  for (let c = 0; c < kept.length; c++) {
    const a = kept[c]![i]!;
    const b = other[c]![j]!;
    if (a !== b && !Number.isNaN(a) && !Number.isNaN(b)) {
      setAside(account, "conflicting-time", line);
      return;
    }
  }
  for (let c = 0; c < kept.length; c++) if (Number.isNaN(kept[c]![i]!)) kept[c]![i] = other[c]![j]!;
  account.merged++;
}

/** Counts rows as used, and those that were put in their place as reordered. */
export function countUsed(account: RowAccount, rows: SortedRows, from: number, to: number): void {
  account.used += to - from;
  for (let i = from; i < to; i++) if (rows.moved[i] === 1) noteLine(account.reordered, rows.lines[i]!);
}
