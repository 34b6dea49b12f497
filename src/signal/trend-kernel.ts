import type { Emit, GridBlock, Kernel } from "./grid-block.ts";
import { MISSING } from "./marks.ts";
import { PolynomialFit } from "./polynomial-fit.ts";

/** A fitted trend over the present samples from firstIndex to lastIndex. */
export interface Trend {
  readonly firstIndex: number;
  readonly lastIndex: number;
  readonly count: number;
  valueAt(index: number): number;
  /** Coefficients a0, a1, … in powers of (index - firstIndex). */
  readonly powers: Float64Array;
}

export interface LearnedTrend {
  /** Samples in a span; null: one trend over the whole record. */
  readonly span: number | null;
  /** By span number floor(index / span); 0 for the whole record. */
  readonly trends: ReadonlyMap<number, Trend>;
  /** Spans with samples but too few of them for a trend: their values are blank. */
  readonly blankSpans: number;
}

/** Grid indices between which samples can stand. */
export interface Extent {
  readonly first: number;
  readonly last: number;
}

/**
 * First pass: fits one polynomial to each span. The basis of a span reaches over the part of it that lies
 * in the record, so that a record that ends early in a span does not spoil the fit's condition.
 */
export class TrendLearner {
  private readonly degree: number;
  private readonly span: number | null;
  private readonly extent: Extent;
  private readonly trends = new Map<number, Trend>();
  private number = Number.NaN;
  private from = 0;
  private to = 0;
  private fit: PolynomialFit | null = null;
  private blankSpans = 0;

  /** @param span  samples in a span, anchored to index 0; null for one trend over the whole record */
  constructor(degree: number, span: number | null, extent: Extent) {
    this.degree = degree;
    this.span = span;
    this.extent = extent;
  }

  push(block: GridBlock): void {
    for (let i = 0; i < block.values.length; i++) {
      const v = block.values[i]!;
      if (Number.isNaN(v)) continue;
      const k = block.first + i;
      const number = this.span === null ? 0 : Math.floor(k / this.span);
      if (number !== this.number) this.open(number);
      this.fit!.add(k - this.from, v);
    }
  }

  finish(): LearnedTrend {
    this.close();
    return { span: this.span, trends: this.trends, blankSpans: this.blankSpans };
  }

  private open(number: number): void {
    this.close();
    const { first, last } = this.extent;
    this.number = number;
    this.from = this.span === null ? first : Math.max(first, number * this.span);
    this.to = this.span === null ? last : Math.min(last, (number + 1) * this.span - 1);
    this.fit = new PolynomialFit(this.degree, 0, Math.max(1, this.to - this.from));
  }

  private close(): void {
    const { fit, from, to } = this;
    if (fit === null) return;
    // With no sample to spare the trend would go through every point and leave exactly nothing.
    const solved = fit.count >= this.degree + 2 ? fit.solve() : null;
    if (solved === null) this.blankSpans++;
    else
      this.trends.set(this.number, {
        firstIndex: from,
        lastIndex: to,
        count: fit.count,
        valueAt: (k) => solved.valueAt(k - from),
        powers: solved.powers(0),
      });
    this.fit = null;
  }
}

/** Second pass: takes the fitted trends away; a span without a trend has no values. */
export class TrendKernel implements Kernel {
  private readonly learned: LearnedTrend;

  constructor(learned: LearnedTrend) {
    this.learned = learned;
  }

  push(block: GridBlock, emit: Emit): void {
    const { span, trends } = this.learned;
    const n = block.values.length;
    const values = new Float64Array(n);
    const marks = Uint8Array.from(block.marks);
    for (let i = 0; i < n; ) {
      const k = block.first + i;
      const number = span === null ? 0 : Math.floor(k / span);
      const stop = span === null ? n : Math.min(n, i + (number + 1) * span - k);
      const trend = trends.get(number);
      for (; i < stop; i++) {
        const v = block.values[i]!;
        if (trend !== undefined || Number.isNaN(v)) values[i] = v - (trend?.valueAt(block.first + i) ?? 0);
        else {
          values[i] = Number.NaN;
          marks[i]! |= MISSING;
        }
      }
    }
    emit({ first: block.first, values, marks });
  }

  flush(): void {}
}
