import type { GridBlock } from "../signal/grid-block.ts";
import { stateOf } from "../signal/marks.ts";
import type { IndexRange } from "./index-range.ts";

/** Columns of a strip that nobody asked otherwise of. */
const COLUMNS = 512;

/**
 * Lowest and highest value per column of time, for a picture of a record of any length in bounded memory:
 * columns are 2^n samples wide, anchored to the absolute index, and double when there would be more than the most.
 */
export class TimeStrip {
  /** Samples in a column. */
  width = 1;
  /** Number of the first column: it starts at grid index first * width. */
  first = Number.NaN;
  low: number[] = [];
  high: number[] = [];
  /** Place in STATES of the worst state in each column. */
  worst: number[] = [];
  private readonly range: IndexRange;
  private readonly most: number;

  constructor(range: IndexRange, most = COLUMNS) {
    this.range = range;
    this.most = most;
  }

  push(block: GridBlock): void {
    const { from, until } = this.range;
    const start = Math.max(0, from - block.first);
    const end = Math.min(block.values.length, until - block.first);
    for (let i = start; i < end; ) {
      const k = block.first + i;
      let column = Math.floor(k / this.width);
      if (Number.isNaN(this.first)) this.first = column;
      while (column - this.first >= this.most) {
        this.widen();
        column = Math.floor(k / this.width);
      }
      const stop = Math.min(end, i + (column + 1) * this.width - k);
      const at = column - this.first;
      let low = this.low[at] ?? Number.POSITIVE_INFINITY;
      let high = this.high[at] ?? Number.NEGATIVE_INFINITY;
      let worst = this.worst[at] ?? 0;
      for (; i < stop; i++) {
        const v = block.values[i]!;
        if (v < low) low = v;
        if (v > high) high = v;
        const state = stateOf(block.marks[i]!);
        if (state > worst) worst = state;
      }
      this.worst[at] = worst;
      this.low[at] = low;
      this.high[at] = high;
    }
  }

  private widen(): void {
    const first = Math.floor(this.first / 2);
    const low: number[] = [];
    const high: number[] = [];
    const worst: number[] = [];
    for (let c = 0; c < this.low.length; c++) {
      const at = Math.floor((this.first + c) / 2) - first;
      low[at] = Math.min(low[at] ?? Number.POSITIVE_INFINITY, this.low[c] ?? Number.POSITIVE_INFINITY);
      high[at] = Math.max(high[at] ?? Number.NEGATIVE_INFINITY, this.high[c] ?? Number.NEGATIVE_INFINITY);
      worst[at] = Math.max(worst[at] ?? 0, this.worst[c] ?? 0);
    }
    this.first = first;
    this.worst = worst;
    this.low = low;
    this.high = high;
    this.width *= 2;
  }
}
