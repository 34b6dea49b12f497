/**
 * From rows with times of their own to an even grid by curves that look at more than two rows: monotone cubic,
 * local cubic, windowed sinc, and the mean over the grid cell. One channel, one pass, bounded memory.
 *
 * A run is a stretch of present rows of which no two neighbours are farther apart than the longest gap; a curve
 * never looks across its ends. A point is filled when the rows around it are more than 1.5 grid intervals
 * apart, as with straight lines. Sources: cubic-interpolation.ts, band-limited.ts, interpolation.ts.
 */
import { bandLimitedAtTime, SincKernel } from "./band-limited.ts";
import { cubicAt, localCubicSlopes, monotoneCubicSlopes } from "./cubic-interpolation.ts";
import {
  fallsOnMultiplesOf,
  firstIndexAtOrAfter,
  type Grid,
  intervalSeconds,
  lastIndexAtOrBefore,
  timeSince,
} from "./grid.ts";
import type { Emit } from "./grid-block.ts";
import { cellMeans } from "./interpolation.ts";
import { END, FILLED, MISSING } from "./marks.ts";
import { NEIGHBOUR_INTERVALS } from "./row-interpolation.ts";

export type Curve = "monotone-cubic" | "local-cubic" | "band-limited" | "cell-mean";

/** Windowed sinc: rows on either side, and the shape of its Kaiser window (error 2e-4 up to 0.4 cycles/row). */
export const SINC = new SincKernel(16, 8);
/** Places between two rows that are told apart for the mean response. */
export const PLACES = 16;
const BLOCK = 8192;
/** Rows that must stand beyond the two around a point, on each side. */
const BEYOND: Record<Curve, number> = {
  "monotone-cubic": 1,
  "local-cubic": 1,
  "band-limited": SINC.half,
  "cell-mean": 0,
};

export interface CurveEffect {
  readonly points: number;
  readonly exact: number;
  /** How many points lay at each sixteenth of the way between their two rows. */
  readonly places: readonly number[];
  /** Points near the ends of runs that a windowed sinc or a cell could not serve. */
  readonly blankNearEnds: number;
}

export class RowCurves {
  private readonly grid: Grid;
  private readonly curve: Curve;
  private readonly longestGap_us: number;
  private readonly neighbour_us: number;
  private readonly slack_us: number;
  private readonly half_us: number;
  private started = false;
  private next = 0;
  private lastRow_us = Number.NaN;
  /** Rows of the run: microseconds since `origin_us`, values. */
  private t = new Float64Array(256);
  private y = new Float64Array(256);
  private rows = 0;
  private origin_us = 0;
  private bracket = 0;
  private points = 0;
  private exact = 0;
  private blankNearEnds = 0;
  private readonly places = new Float64Array(PLACES);
  private values = new Float64Array(BLOCK);
  private marks = new Uint8Array(BLOCK);
  private count = 0;

  constructor(grid: Grid, curve: Curve, longestGap_us: number) {
    const interval_us = intervalSeconds(grid) * 1e6;
    this.grid = grid;
    this.curve = curve;
    this.longestGap_us = longestGap_us;
    this.neighbour_us = NEIGHBOUR_INTERVALS * interval_us;
    this.slack_us = fallsOnMultiplesOf(grid, 1) ? 0 : 0.5;
    this.half_us = interval_us / 2;
  }

  push(times: Float64Array, column: Float64Array, count: number, emit: Emit): void {
    for (let i = 0; i < count; i++) {
      const t = times[i]!;
      const v = column[i]!;
      if (!this.started) {
        this.started = true;
        this.next = firstIndexAtOrAfter(this.grid, t - this.slack_us);
      }
      this.lastRow_us = t;
      const last_us = this.rows === 0 ? Number.NEGATIVE_INFINITY : this.origin_us + this.t[this.rows - 1]!;
      if (t - last_us > this.longestGap_us) {
        this.endRun(emit);
        this.blankTo(firstIndexAtOrAfter(this.grid, t - this.slack_us) - 1, emit);
      }
      if (Number.isNaN(v)) continue;
      this.append(t, v);
      this.serve(false, emit);
    }
    this.hand(emit);
  }

  flush(emit: Emit): void {
    if (this.started) {
      this.endRun(emit);
      this.blankTo(lastIndexAtOrBefore(this.grid, this.lastRow_us + this.slack_us), emit);
    }
    this.hand(emit);
  }

  effect(): CurveEffect {
    return {
      points: this.points,
      exact: this.exact,
      places: Array.from(this.places),
      blankNearEnds: this.blankNearEnds,
    };
  }

  private append(time: number, value: number): void {
    if (this.rows === 0) {
      this.origin_us = time;
      this.bracket = 0;
    }
    if (this.rows === this.t.length) this.makeRoom();
    this.t[this.rows] = time - this.origin_us;
    this.y[this.rows] = value;
    this.rows++;
  }

  /** Forgets rows that no later point looks at, or grows. */
  private makeRoom(): void {
    const drop = Math.max(0, this.bracket - BEYOND[this.curve] - 1);
    if (drop > this.rows / 2) {
      this.t.copyWithin(0, drop, this.rows);
      this.y.copyWithin(0, drop, this.rows);
      this.rows -= drop;
      this.bracket -= drop;
      return;
    }
    const grow = (a: Float64Array) => {
      const b = new Float64Array(2 * a.length);
      b.set(a);
      return b;
    };
    this.t = grow(this.t);
    this.y = grow(this.y);
  }

  private endRun(emit: Emit): void {
    this.serve(true, emit);
    this.rows = 0;
  }

  /** Emits the points that the rows so far decide; all of the run when it has ended. */
  private serve(ended: boolean, emit: Emit): void {
    const { t, slack_us } = this;
    if (this.rows === 0) return;
    const cell = this.curve === "cell-mean";
    for (;;) {
      const last = this.rows - 1;
      const at = timeSince(this.grid, this.next, this.origin_us);
      // A cell that reaches beyond the run's first row has no mean.
      if (at < t[0]! - slack_us) {
        this.store(Number.NaN, MISSING | END, emit);
        this.blankNearEnds++;
        continue;
      }
      if (at > t[last]! + slack_us) return;
      while (this.bracket < last - 1 && t[this.bracket + 1]! <= at) this.bracket++;
      const hasAll = cell ? t[last]! >= at + this.half_us : last - this.bracket - 1 >= BEYOND[this.curve];
      if (!ended && !hasAll) return;
      this.point(emit);
    }
  }

  private point(emit: Emit): void {
    const { t, y, bracket: k, rows, slack_us, half_us } = this;
    // Times are taken from the point itself, not from the run's start, so that no bit depends on where that was.
    const since = timeSince(this.grid, this.next, this.origin_us + t[k]!);
    const place = (i: number) => t[i]! - t[k]! - since;
    const hit = since <= slack_us ? k : k + 1 < rows && place(k + 1) <= slack_us ? k + 1 : -1;
    const cell = this.curve === "cell-mean";
    if (hit >= 0 && !cell) {
      this.exact++;
      this.put(y[hit]!, 0, emit);
      return;
    }
    const beyond = BEYOND[this.curve] + 1;
    let from = Math.max(0, k - beyond);
    let to = Math.min(rows, k + 2 + beyond);
    if (cell) {
      while (from > 0 && place(from) > -half_us) from--;
      while (to < rows && place(to - 1) < half_us) to++;
    }
    const ts = Float64Array.from({ length: to - from }, (_, i) => place(from + i));
    const ys = y.subarray(from, to);
    const value = this.valueAt(ts, ys);
    if (Number.isNaN(value)) {
      this.blankNearEnds++;
      this.store(Number.NaN, MISSING | END, emit);
      return;
    }
    const gap = cell ? this.longestStep(ts) : t[k + 1]! - t[k]!;
    if (k + 1 < rows) {
      const u = since / (t[k + 1]! - t[k]!);
      this.places[Math.min(PLACES - 1, Math.max(0, Math.floor(u * PLACES)))]!++;
    }
    this.put(value, gap > this.neighbour_us ? FILLED : 0, emit);
  }

  /** Value at time 0 of rows at times t. */
  private valueAt(t: Float64Array, y: Float64Array): number {
    switch (this.curve) {
      case "monotone-cubic":
        return cubicAt(t, y, monotoneCubicSlopes(t, y), 0);
      case "local-cubic":
        return cubicAt(t, y, localCubicSlopes(t, y), 0);
      case "band-limited":
        return bandLimitedAtTime(t, y, 0, (t[t.length - 1]! - t[0]!) / (t.length - 1), SINC);
      case "cell-mean":
        return cellMeans(t, y, Float64Array.of(-this.half_us, this.half_us))[0]!;
    }
  }

  /** Longest step between the rows that a cell rests on. */
  private longestStep(t: Float64Array): number {
    let longest = 0;
    for (let i = 1; i < t.length; i++)
      if (t[i]! > -this.half_us && t[i - 1]! < this.half_us) longest = Math.max(longest, t[i]! - t[i - 1]!);
    return longest;
  }

  private blankTo(last: number, emit: Emit): void {
    while (this.next <= last) this.store(Number.NaN, MISSING, emit);
  }

  private put(value: number, mark: number, emit: Emit): void {
    this.points++;
    this.store(value, mark, emit);
  }

  private store(value: number, mark: number, emit: Emit): void {
    this.values[this.count] = value;
    this.marks[this.count] = mark;
    this.count++;
    this.next++;
    if (this.count === BLOCK) this.hand(emit);
  }

  private hand(emit: Emit): void {
    if (this.count === 0) return;
    const block = {
      first: this.next - this.count,
      values: this.values.slice(0, this.count),
      marks: this.marks.slice(0, this.count),
    };
    this.count = 0;
    emit(block);
  }
}
