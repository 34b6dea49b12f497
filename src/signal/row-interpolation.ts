/**
 * From rows with times of their own to an even grid, one channel at a time, in one pass.
 *
 * A grid point lies between the last present row at or before it and the next one after it. When the two
 * are farther apart than `longestGap_us` nothing is put there. A point on which a row falls exactly, or
 * whose two rows are at most 1.5 grid intervals apart, is measured; any other bridged point is filled.
 * With nearest-sample a row also serves the grid times up to half an interval away from it, whatever gap lies
 * beyond, and those are measured. Where grid times are not whole microseconds, a row within half a microsecond
 * is on the point: stamps are rounded to microseconds.
 */
import {
  fallsOnMultiplesOf,
  firstIndexAtOrAfter,
  type Grid,
  intervalSeconds,
  lastIndexAtOrBefore,
  timeSince,
} from "./grid.ts";
import type { Emit, GridBlock } from "./grid-block.ts";
import { FILLED, MISSING } from "./marks.ts";

export type Between = "nearest-sample" | "straight-line";

/** Grid samples emitted at a time; only the size of blocks depends on it. */
const BLOCK = 8192;
/** Rows at most this many grid intervals apart count as neighbours without a row missing between them. */
export const NEIGHBOUR_INTERVALS = 1.5;

export interface InterpolationEffect {
  /** Grid points with a value. */
  readonly points: number;
  /** Points on which a row fell exactly. */
  readonly exact: number;
  /** straight-line: mean of 2 u (1 - u), u the place between the two rows; see meanPowerGain. */
  readonly blend: number;
  /** nearest-sample: root mean square and largest distance in time of the row used, seconds. */
  readonly displaced_rms_s: number;
  readonly displaced_max_s: number;
}

/**
 * Mean power gain of straight-line interpolation at f, over the places u that occurred: a point at u
 * between rows T apart has |H|^2 = 1 - 2 u (1 - u) (1 - cos 2 pi f T).
 * Source: direct from the two-tap filter (1 - u, u).
 */
export function meanPowerGain(blend: number, f_Hz: number, rowInterval_s: number): number {
  return 1 - blend * (1 - Math.cos(2 * Math.PI * f_Hz * rowInterval_s));
}

export class RowInterpolator {
  private readonly grid: Grid;
  private readonly line: boolean;
  private readonly longestGap_us: number;
  private readonly neighbour_us: number;
  /** How far from a row a grid time may be and still be served by it alone. */
  private readonly near_us: number;
  private started = false;
  private next = 0;
  private previous_us = Number.NaN;
  private previous = Number.NaN;
  private lastRow_us = Number.NaN;
  private points = 0;
  private exact = 0;
  private blendSum = 0;
  private displacedSum = 0;
  private displacedMax = 0;
  private values = new Float64Array(BLOCK);
  private marks = new Uint8Array(BLOCK);
  private count = 0;

  constructor(grid: Grid, between: Between, longestGap_us: number) {
    const interval_us = intervalSeconds(grid) * 1e6;
    this.grid = grid;
    this.line = between === "straight-line";
    this.longestGap_us = longestGap_us;
    this.neighbour_us = NEIGHBOUR_INTERVALS * interval_us;
    const slack_us = fallsOnMultiplesOf(grid, 1) ? 0 : 0.5;
    this.near_us = this.line ? slack_us : Math.max(slack_us, interval_us / 2);
  }

  push(times: Float64Array, column: Float64Array, count: number, emit: Emit): void {
    for (let i = 0; i < count; i++) {
      const t = times[i]!;
      const v = column[i]!;
      if (!this.started) {
        this.started = true;
        this.next = this.firstNear(t);
      }
      this.lastRow_us = t;
      const gap = t - this.previous_us;
      if (Number.isNaN(v)) {
        // Once the gap is too long to bridge, what lies in it is known to be missing whatever comes.
        if (!(gap <= this.longestGap_us)) {
          this.leave(emit);
          this.blankTo(Math.min(lastIndexAtOrBefore(this.grid, t), this.firstNear(t) - 1), emit);
        }
        continue;
      }
      if (gap <= this.longestGap_us) this.bridge(v, gap, emit);
      else {
        this.leave(emit);
        this.blankTo(this.firstNear(t) - 1, emit);
        this.arrive(t, v, emit);
      }
      this.previous_us = t;
      this.previous = v;
    }
    this.hand(emit);
  }

  flush(emit: Emit): void {
    if (this.started) {
      this.leave(emit);
      this.blankTo(this.lastNear(this.lastRow_us), emit);
    }
    this.hand(emit);
  }

  effect(): InterpolationEffect {
    const n = Math.max(1, this.points);
    return {
      points: this.points,
      exact: this.exact,
      blend: this.blendSum / n,
      displaced_rms_s: Math.sqrt(this.displacedSum / n) / 1e6,
      displaced_max_s: this.displacedMax / 1e6,
    };
  }

  /** First grid time that a row at t could serve alone, or that lies after it. */
  private firstNear(t: number): number {
    return firstIndexAtOrAfter(this.grid, t - this.near_us);
  }

  private lastNear(t: number): number {
    return lastIndexAtOrBefore(this.grid, t + this.near_us);
  }

  /** The points after the previous row up to this one, between two rows near enough to each other. */
  private bridge(v: number, gap: number, emit: Emit): void {
    const mark = gap > this.neighbour_us ? FILLED : 0;
    for (;;) {
      const since = timeSince(this.grid, this.next, this.previous_us);
      const away = gap - since;
      if (this.line) {
        if (away < -this.near_us) return;
        if (away <= this.near_us) {
          this.exact++;
          this.put(v, 0, emit);
          return;
        }
        const u = since / gap;
        this.blendSum += 2 * u * (1 - u);
        this.put(this.previous + (v - this.previous) * u, mark, emit);
      } else {
        if (away < 0) return;
        const late = since > away;
        const distance = late ? away : since;
        this.displaced(distance);
        this.put(late ? v : this.previous, distance <= this.near_us ? 0 : mark, emit);
      }
    }
  }

  /** The points that the previous row serves alone, before a gap or the end. */
  private leave(emit: Emit): void {
    if (Number.isNaN(this.previous_us)) return;
    for (;;) {
      const since = timeSince(this.grid, this.next, this.previous_us);
      if (since > this.near_us) return;
      this.displaced(since);
      this.put(this.previous, 0, emit);
    }
  }

  /** The points at or before a row after a gap that it serves alone. */
  private arrive(t: number, v: number, emit: Emit): void {
    for (;;) {
      const since = timeSince(this.grid, this.next, t);
      if (since > (this.line ? this.near_us : 0)) return;
      this.displaced(Math.abs(since));
      this.put(v, 0, emit);
    }
  }

  private displaced(distance: number): void {
    if (distance === 0 || this.line) this.exact++;
    this.displacedSum += distance * distance;
    if (distance > this.displacedMax) this.displacedMax = distance;
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
    const block: GridBlock = {
      first: this.next - this.count,
      values: this.values.slice(0, this.count),
      marks: this.marks.slice(0, this.count),
    };
    this.count = 0;
    emit(block);
  }
}
