/**
 * Hampel identifier over a span of time, as rows come: a value is a spike when it lies more than `deviations`
 * scaled deviations from the median of the values at most half a span away on either side (itself among them).
 * The scale is 1.4826 times the median absolute deviation, and never below a floor. At the ends of the record
 * the window is the part inside; fewer than 5 values judge nothing. References: see robust.ts.
 */
import { HAMPEL_SCALE } from "./robust.ts";
import { type Reject, type RowTest, rounding } from "./row-test.ts";
import { SortedWindow } from "./sorted-window.ts";

/** Of four values or fewer, half could be wrong without the median showing it. */
export const FEWEST_VALUES = 5;
/** A step counts as found when this many of the other values differ from the median. */
const STEP_SHOWN = 3;

export interface SpikeSettings {
  readonly halfSpan_us: number;
  /** > 0; exceeded strictly. */
  readonly deviations: number;
  /** Least scale, in the unit of the values; null: the quantisation step found in the window. */
  readonly floor: number | null;
}

export class SpikeWindow implements RowTest {
  private readonly settings: SpikeSettings;
  private readonly reject: Reject;
  private readonly window = new SortedWindow();
  private times = new Float64Array(256);
  private values = new Float64Array(256);
  /** Number of the row in times[0]; rows held; places of the window's first row and of the row to judge. */
  private base = 0;
  private length = 0;
  private first = 0;
  private judge = 0;

  constructor(settings: SpikeSettings, reject: Reject) {
    this.settings = settings;
    this.reject = reject;
  }

  push(row: number, t: number, value: number): number {
    const { halfSpan_us } = this.settings;
    while (this.judge < this.length && t - this.times[this.judge]! > halfSpan_us) this.judgeNext();
    if (this.length === this.times.length) this.makeRoom();
    if (this.length === 0) this.base = row;
    this.times[this.length] = t;
    this.values[this.length] = value;
    this.length++;
    if (!Number.isNaN(value)) this.window.add(value);
    return this.base + this.judge;
  }

  flush(): void {
    while (this.judge < this.length) this.judgeNext();
  }

  private judgeNext(): void {
    const { times, values, window } = this;
    const { halfSpan_us, deviations, floor } = this.settings;
    const j = this.judge++;
    const v = values[j]!;
    for (; times[j]! - times[this.first]! > halfSpan_us; this.first++) {
      const left = values[this.first]!;
      if (!Number.isNaN(left)) window.remove(left);
    }
    if (Number.isNaN(v) || window.size < FEWEST_VALUES) return;
    const centre = window.median();
    const distance = Math.abs(v - centre);
    if (distance === 0) return;
    const scale = HAMPEL_SCALE * window.medianAbsoluteDeviation();
    if (!(distance > deviations * scale)) return;
    const least = floor ?? this.quantisationStep(v, centre);
    if (distance > deviations * least + rounding(v, centre)) this.reject(this.base + j);
  }

  /**
   * Smallest difference between the other values of the window. Where fewer than three of them differ from the
   * median, they may be spikes too and show no step: then it is the last decimal place of the two values.
   */
  private quantisationStep(v: number, centre: number): number {
    const { window } = this;
    const n = window.size;
    let differing = 0;
    let smallest = Number.POSITIVE_INFINITY;
    let leftOut = false;
    let previous = Number.NaN;
    for (let rank = 0; rank < n; rank++) {
      const x = window.at(rank);
      if (!leftOut && x === v) {
        leftOut = true;
        continue;
      }
      if (x !== centre) differing++;
      const step = x - previous;
      if (step > 0 && step < smallest) smallest = step;
      previous = x;
    }
    return differing < STEP_SHOWN || smallest === Number.POSITIVE_INFINITY
      ? Math.min(smallest, lastPlace(v, centre))
      : smallest;
  }

  private makeRoom(): void {
    if (this.first > this.length / 2) {
      this.times.copyWithin(0, this.first, this.length);
      this.values.copyWithin(0, this.first, this.length);
      this.base += this.first;
      this.length -= this.first;
      this.judge -= this.first;
      this.first = 0;
      return;
    }
    const grown = (a: Float64Array) => {
      const b = new Float64Array(2 * a.length);
      b.set(a);
      return b;
    };
    this.times = grown(this.times);
    this.values = grown(this.values);
  }
}

/** Place of the last decimal of the shortest texts that give these numbers: 0.01 for 6.1 and 6.25. */
function lastPlace(...numbers: readonly number[]): number {
  let digits = 0;
  for (const x of numbers) {
    const [mantissa = "", exponent = "0"] = x.toExponential().split("e");
    const behind = mantissa.replace("-", "").replace(".", "").length - 1;
    digits = Math.max(digits, behind - Number(exponent));
  }
  return 10 ** -digits;
}
