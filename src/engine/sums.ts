/**
 * Sums over samples that do not depend on how the record was cut into blocks: plain sums inside cells of
 * 256 samples anchored to the absolute index, compensated (Neumaier 1974) from cell to cell.
 */
import { CompensatedSum } from "../signal/compensated-sum.ts";
import type { GridBlock } from "../signal/grid-block.ts";
import type { IndexRange } from "./index-range.ts";

const CELL_BITS = 8;

/**
 * First and second moments of before (x), after (y) and removed (r = x - y), over the samples that have
 * both. Taken about the first sample's values, so that a large constant costs no digits.
 */
export class PairSums {
  count = 0;
  private pivotX = 0;
  private pivotY = 0;
  private cell = Number.NaN;
  private readonly inCell = new Float64Array(7);
  private readonly totals = Array.from({ length: 7 }, () => new CompensatedSum());

  add(index: number, x: number, y: number): void {
    if (this.count === 0) {
      this.pivotX = x;
      this.pivotY = y;
    }
    const cell = Math.floor(index / (1 << CELL_BITS));
    if (cell !== this.cell) {
      this.closeCell();
      this.cell = cell;
    }
    const a = x - this.pivotX;
    const b = y - this.pivotY;
    const r = a - b;
    const s = this.inCell;
    s[0]! += a;
    s[1]! += b;
    s[2]! += a * a;
    s[3]! += b * b;
    s[4]! += r;
    s[5]! += r * r;
    s[6]! += b * r;
    this.count++;
  }

  private closeCell(): void {
    for (let i = 0; i < 7; i++) {
      this.totals[i]!.add(this.inCell[i]!);
      this.inCell[i] = 0;
    }
  }

  /** Means and mean squares about the means; null when no sample had both. */
  figures(): PairFigures | null {
    if (this.count === 0) return null;
    this.closeCell();
    this.cell = Number.NaN;
    const n = this.count;
    const [a, b, aa, bb, r, rr, br] = this.totals.map((t) => t.total / n) as [
      number,
      number,
      number,
      number,
      number,
      number,
      number,
    ];
    const about = (square: number, mean: number) => Math.max(0, square - mean * mean);
    return {
      count: n,
      meanIn: this.pivotX + a,
      meanOut: this.pivotY + b,
      meanRemoved: this.pivotX - this.pivotY + r,
      varianceIn: about(aa, a),
      varianceOut: about(bb, b),
      varianceRemoved: about(rr, r),
      covarianceOutRemoved: br - b * r,
    };
  }
}

export interface PairFigures {
  readonly count: number;
  readonly meanIn: number;
  readonly meanOut: number;
  readonly meanRemoved: number;
  readonly varianceIn: number;
  readonly varianceOut: number;
  readonly varianceRemoved: number;
  readonly covarianceOutRemoved: number;
}

/** Highest and lowest value with the index of their first occurrence. */
export class Extremes {
  high = Number.NEGATIVE_INFINITY;
  highAt = 0;
  low = Number.POSITIVE_INFINITY;
  lowAt = 0;
  any = false;

  add(index: number, value: number): void {
    this.any = true;
    if (value > this.high) {
      this.high = value;
      this.highAt = index;
    }
    if (value < this.low) {
      this.low = value;
      this.lowAt = index;
    }
  }

  /** The present samples of a block inside a range. */
  addBlock(block: GridBlock, range: IndexRange): void {
    const start = Math.max(0, range.from - block.first);
    const end = Math.min(block.values.length, range.until - block.first);
    for (let i = start; i < end; i++) {
      const v = block.values[i]!;
      if (!Number.isNaN(v)) this.add(block.first + i, v);
    }
  }
}
