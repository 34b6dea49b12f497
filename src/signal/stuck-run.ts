/**
 * Finds values that do not move: stretches of neighbouring values, longer in time than `over`, in which the
 * highest and the lowest differ by no more than `within`. All values of such a stretch are rejected. Absent rows
 * inside are passed over; two values farther apart in time than `over` never belong together, since nothing is
 * known of what lies between them.
 */
import { type Reject, type RowTest, rounding } from "./row-test.ts";

export class StuckRun implements RowTest {
  private readonly over_us: number;
  private readonly within: number;
  private readonly reject: Reject;
  /** The run: row numbers, times and values, from `start` to `end` of these arrays. */
  private rows = new Float64Array(256);
  private times = new Float64Array(256);
  private values = new Float64Array(256);
  private start = 0;
  private end = 0;
  /** Places in the run of falling highest and rising lowest values (two monotone queues). */
  private high: number[] = [];
  private low: number[] = [];
  private highFrom = 0;
  private lowFrom = 0;
  /** Rows below this number are rejected already. */
  private rejectedTo = 0;

  /**
   * @param over_us  > 0
   * @param within   >= 0, in the unit of the values
   */
  constructor(over_us: number, within: number, reject: Reject) {
    this.over_us = over_us;
    this.within = within;
    this.reject = reject;
  }

  push(row: number, t: number, value: number): number {
    if (this.end > this.start && t - this.times[this.end - 1]! > this.over_us) this.clear();
    if (Number.isNaN(value)) return this.end > this.start ? this.decided() : row + 1;
    this.append(row, t, value);
    while (
      this.highest() - this.lowest() >
      this.within * (1 + 1e-9) + rounding(this.highest(), this.lowest())
    )
      this.dropFirst();
    if (t - this.times[this.start]! > this.over_us) {
      for (let k = this.start; k < this.end; k++)
        if (this.rows[k]! >= this.rejectedTo) this.reject(this.rows[k]!);
      this.rejectedTo = row + 1;
      // The shortest run that is long enough is all that later values need.
      while (t - this.times[this.start + 1]! > this.over_us) this.dropFirst();
    }
    return this.decided();
  }

  flush(): void {}

  private decided(): number {
    const lastRow = this.rows[this.end - 1]!;
    if (this.rejectedTo > lastRow) return lastRow + 1;
    return Math.max(this.rows[this.start]!, this.rejectedTo);
  }

  private highest(): number {
    return this.values[this.high[this.highFrom]!]!;
  }

  private lowest(): number {
    return this.values[this.low[this.lowFrom]!]!;
  }

  private append(row: number, t: number, value: number): void {
    if (this.end === this.rows.length) this.makeRoom();
    const k = this.end++;
    this.rows[k] = row;
    this.times[k] = t;
    this.values[k] = value;
    while (this.high.length > this.highFrom && this.values[this.high.at(-1)!]! <= value) this.high.pop();
    this.high.push(k);
    while (this.low.length > this.lowFrom && this.values[this.low.at(-1)!]! >= value) this.low.pop();
    this.low.push(k);
  }

  private dropFirst(): void {
    if (this.high[this.highFrom] === this.start) this.highFrom++;
    if (this.low[this.lowFrom] === this.start) this.lowFrom++;
    this.start++;
  }

  private clear(): void {
    this.start = 0;
    this.end = 0;
    this.high = [];
    this.low = [];
    this.highFrom = 0;
    this.lowFrom = 0;
  }

  private makeRoom(): void {
    const { start } = this;
    const grow = this.end - start > this.rows.length / 2;
    const moved = (a: Float64Array) => {
      const b = new Float64Array(grow ? 2 * a.length : a.length);
      b.set(a.subarray(start, this.end));
      return b;
    };
    this.rows = moved(this.rows);
    this.times = moved(this.times);
    this.values = moved(this.values);
    this.high = this.high.slice(this.highFrom).map((k) => k - start);
    this.low = this.low.slice(this.lowFrom).map((k) => k - start);
    this.highFrom = 0;
    this.lowFrom = 0;
    this.end -= start;
    this.start = 0;
  }
}
