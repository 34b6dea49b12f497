import { slidingDot } from "./convolve.ts";
import type { Emit, GridBlock, Kernel } from "./grid-block.ts";
import { CARRIED, END, MISSING, SCREENED, THIN } from "./marks.ts";
import { runningMean } from "./running-mean.ts";
import { SampleBuffer } from "./sample-buffer.ts";

/** What happens where the window is not full: at the true ends of a run and at gaps. */
export type Ends = "blank" | "part-window" | "turned";

export interface WindowOptions {
  /** Taps in convolution order: y[k] = sum of taps[j] * x[k + after - j]. */
  readonly taps: Float64Array;
  /** Samples of the window after the output's index; taps.length - 1 - after stand before it. */
  readonly after: number;
  readonly ends: Ends;
  /** Least share of present samples, 0 < coverage <= 1; below 1, missing samples inside are left out. */
  readonly coverage: number;
  /** Only outputs whose index is a multiple of this are computed; index k becomes k / keepEvery. */
  readonly keepEvery: number;
  /** All taps are 1 / N: the window is a running mean. */
  readonly equal: boolean;
  /** The output lies half a sample later than its index (even centred window): one output fewer. */
  readonly betweenSamples: boolean;
}

/**
 * Slides a weighted window over one channel. A full window is a plain dot product; a window with an
 * absent sample in it is blank, or part of a window, or completed by turning the signal about its end,
 * as the options say. One absent sample touches at most N outputs.
 */
export class WindowKernel implements Kernel {
  private readonly options: WindowOptions;
  /** Weights in order of time. */
  private readonly weights: Float64Array;
  private readonly before: number;
  private readonly total: number;
  private readonly magnitude: number;
  private readonly buffer = new SampleBuffer();
  /** Next index to compute on the input's grid. */
  private next = 0;
  /** Outputs of the present batch that rest on a run inside their window, not on all of it. */
  private readonly onRun = new Set<number>();

  constructor(options: WindowOptions) {
    this.options = options;
    this.weights = Float64Array.from(options.taps).reverse();
    this.before = options.taps.length - 1 - options.after;
    this.total = options.taps.reduce((sum, w) => sum + w, 0);
    this.magnitude = options.taps.reduce((sum, w) => sum + Math.abs(w), 0);
  }

  push(block: GridBlock, emit: Emit): void {
    if (block.values.length === 0) return;
    if (!this.buffer.started) this.next = this.onStep(block.first);
    this.buffer.append(block);
    this.compute(this.buffer.end - 1 - this.options.after, emit);
    this.buffer.dropBefore(this.next - this.before);
  }

  flush(emit: Emit): void {
    if (!this.buffer.started) return;
    this.compute(this.buffer.end - 1 - (this.options.betweenSamples ? 1 : 0), emit);
  }

  private onStep(k: number): number {
    return Math.ceil(k / this.options.keepEvery) * this.options.keepEvery;
  }

  /** Computes the outputs from `next` to `last` (input indices) and emits them. */
  private compute(last: number, emit: Emit): void {
    const step = this.options.keepEvery;
    const count = Math.floor((last - this.next) / step) + 1;
    if (count <= 0) return;
    const values = new Float64Array(count);
    const marks = new Uint8Array(count);
    const absent = this.absentBefore();
    let o = 0;
    while (o < count) {
      const full = this.fullFrom(o, count, absent);
      if (full > 0) {
        this.fillFull(values, o, full);
        o += full;
      } else {
        this.fillPart(this.next + o * step, o, values, marks, absent);
        o++;
      }
    }
    this.carryMarks(marks, values);
    this.onRun.clear();
    emit({ first: this.next / step, values, marks });
    this.next += count * step;
  }

  /** absent[i]: how many of the buffer's first i samples are absent; null when none is. */
  private absentBefore(): Int32Array | null {
    const { values, length } = this.buffer;
    let i = 0;
    while (i < length && !Number.isNaN(values[i]!)) i++;
    if (i === length) return null;
    const absent = new Int32Array(length + 1);
    for (i = 0; i < length; i++) absent[i + 1] = absent[i]! + (Number.isNaN(values[i]!) ? 1 : 0);
    return absent;
  }

  /** How many outputs from number o on have a full window, one after the other. */
  private fullFrom(o: number, count: number, absent: Int32Array | null): number {
    const n = this.weights.length;
    const step = this.options.keepEvery;
    let run = 0;
    for (let p = this.next + o * step - this.before - this.buffer.base; o + run < count; run++, p += step) {
      if (p < 0 || p + n > this.buffer.length) break;
      if (absent === null) {
        const room = Math.floor((this.buffer.length - n - p) / step) + 1;
        return Math.min(run + room, count - o);
      }
      if (absent[p + n]! !== absent[p]!) break;
    }
    return run;
  }

  private fillFull(values: Float64Array, o: number, count: number): void {
    const k = this.next + o * this.options.keepEvery;
    const start = k - this.before - this.buffer.base;
    if (this.options.equal && this.options.keepEvery === 1)
      runningMean(this.buffer.values, start, k - this.before, this.weights.length, values, o, count);
    else slidingDot(this.buffer.values, start, this.options.keepEvery, this.weights, values, o, count);
  }

  /** One output whose window is not full. */
  private fillPart(
    k: number,
    o: number,
    values: Float64Array,
    marks: Uint8Array,
    absent: Int32Array | null,
  ): void {
    const { coverage, ends } = this.options;
    const n = this.weights.length;
    const from = k - this.before;
    const lo = Math.max(from, this.buffer.base);
    const hi = Math.min(from + n, this.buffer.end);
    const gone = absent === null ? 0 : absent[hi - this.buffer.base]! - absent[lo - this.buffer.base]!;
    const present = hi - lo - gone;
    values[o] = Number.NaN;
    if (coverage < 1 && present >= coverage * n - 1e-9) {
      const y = this.weightedPart(from, lo, hi);
      if (y !== undefined) {
        values[o] = y;
        marks[o] = THIN;
        return;
      }
    }
    const run = ends === "blank" ? undefined : this.runAround(k, lo, hi);
    if (run !== undefined) {
      const y = ends === "turned" ? this.turned(from, run) : this.weightedPart(from, run.from, run.to);
      if (y !== undefined) {
        values[o] = y;
        marks[o] = END | this.carriedIn(run);
        this.onRun.add(o);
        return;
      }
    }
    marks[o] = this.blankMark(k, lo, hi, present);
  }

  /** Present samples in [lo, hi), weights rescaled to the window's whole gain. */
  private weightedPart(from: number, lo: number, hi: number): number | undefined {
    let sum = 0;
    let weight = 0;
    for (let i = lo; i < hi; i++) {
      const v = this.buffer.values[i - this.buffer.base]!;
      if (Number.isNaN(v)) continue;
      const w = this.weights[i - from]!;
      sum += w * v;
      weight += w;
    }
    // Weights that nearly cancel would blow the sum up: no value is better than that one.
    if (Math.abs(weight) < 1e-6 * this.magnitude) return undefined;
    return (sum / weight) * this.total;
  }

  /** The present samples next to each other that hold the output's own place, inside [lo, hi). */
  private runAround(k: number, lo: number, hi: number): { from: number; to: number } | undefined {
    const there = (i: number) =>
      i >= lo && i < hi && !Number.isNaN(this.buffer.values[i - this.buffer.base]!);
    // An output between two samples lies inside the run only when both are there.
    if (!there(k) || (this.options.betweenSamples && !there(k + 1))) return undefined;
    let from = k;
    let to = k + 1;
    while (there(from - 1)) from--;
    while (there(to)) to++;
    return { from, to };
  }

  /** The run turned about its end points: x(end + m) = 2 x(end) - x(end - m). */
  private turned(from: number, run: { from: number; to: number }): number | undefined {
    const x = (i: number) => this.buffer.values[i - this.buffer.base]!;
    const first = x(run.from);
    const last = x(run.to - 1);
    let sum = 0;
    for (let i = 0; i < this.weights.length; i++) {
      const k = from + i;
      let v: number;
      if (k < run.from) {
        const mirror = 2 * run.from - k;
        if (mirror >= run.to) return undefined;
        v = 2 * first - x(mirror);
      } else if (k >= run.to) {
        const mirror = 2 * (run.to - 1) - k;
        if (mirror < run.from) return undefined;
        v = 2 * last - x(mirror);
      } else v = x(k);
      sum += this.weights[i]! * v;
    }
    return sum;
  }

  private blankMark(k: number, lo: number, hi: number, present: number): number {
    const own = k - this.buffer.base;
    const ownThere = own >= 0 && own < this.buffer.length && !Number.isNaN(this.buffer.values[own]!);
    if (present === 0 && hi > lo) {
      let screened = hi - lo === this.weights.length;
      for (let i = lo; screened && i < hi; i++)
        screened = (this.buffer.marks[i - this.buffer.base]! & SCREENED) !== 0;
      if (screened) return SCREENED;
    }
    return ownThere ? MISSING | END : MISSING;
  }

  private carriedIn(run: { from: number; to: number }): number {
    const { marks, base } = this.buffer;
    let held = 0;
    for (let i = run.from; i < run.to; i++) held |= marks[i - base]! & CARRIED;
    return held;
  }

  /** Hands the marks of the samples in each window on to its output. */
  private carryMarks(marks: Uint8Array, values: Float64Array): void {
    const { marks: held, base, length } = this.buffer;
    let any = 0;
    for (let i = 0; i < length; i++) any |= held[i]! & CARRIED;
    if (any === 0) return;
    const n = this.weights.length;
    for (let bit = 1; bit <= any; bit <<= 1) {
      if ((any & bit) === 0) continue;
      let seen = -1;
      let i = 0;
      for (let o = 0; o < marks.length; o++) {
        const from = this.next + o * this.options.keepEvery - this.before - base;
        // An absent sample hands nothing on: what was computed here does not rest on it.
        for (const to = Math.min(from + n, length); i < to; i++)
          if ((held[i]! & bit) !== 0 && (held[i]! & (MISSING | SCREENED)) === 0) seen = i;
        if (seen >= from && seen >= 0 && !Number.isNaN(values[o]!) && !this.onRun.has(o)) marks[o]! |= bit;
      }
    }
  }
}
