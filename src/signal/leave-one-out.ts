/**
 * Error of interpolation as the data show it: each row in turn is left out and guessed from its neighbours.
 * The guess bridges two intervals, so it errs on the high side (leave-one-out; M. Stone (1974), Journal of the
 * Royal Statistical Society B 36, 111-147; recalled from memory).
 */
import { cubicAt, localCubicSlopes, monotoneCubicSlopes } from "./cubic-interpolation.ts";
import { nearestSampleAt, straightLineAt } from "./interpolation.ts";

export type Guess = "nearest-sample" | "straight-line" | "monotone-cubic" | "local-cubic";

/** Rows on either side that a guess may look at. */
const SIDE = 2;

export class LeaveOneOut {
  count = 0;
  private square = 0;
  private readonly guess: Guess;
  private readonly longestGap_us: number;
  private readonly t = new Float64Array(2 * SIDE + 1);
  private readonly y = new Float64Array(2 * SIDE + 1);
  private held = 0;
  private readonly nt = new Float64Array(2 * SIDE);
  private readonly ny = new Float64Array(2 * SIDE);

  constructor(guess: Guess, longestGap_us: number) {
    this.guess = guess;
    this.longestGap_us = longestGap_us;
  }

  /** Rows in order of time; missing values are passed over. */
  push(times: Float64Array, column: Float64Array, count: number): void {
    const { t, y } = this;
    const size = t.length;
    for (let i = 0; i < count; i++) {
      const value = column[i]!;
      if (Number.isNaN(value)) continue;
      const time = times[i]!;
      // Only rows near enough to be joined with one left out between them.
      if (this.held > 0 && time - t[this.held - 1]! > this.longestGap_us / 2) this.held = 0;
      if (this.held === size) {
        t.copyWithin(0, 1);
        y.copyWithin(0, 1);
        this.held--;
      }
      t[this.held] = time;
      y[this.held] = value;
      this.held++;
      if (this.held === size) this.judge();
    }
  }

  /** Root mean square error; null when no row could be judged. */
  rms(): number | null {
    return this.count === 0 ? null : Math.sqrt(this.square / this.count);
  }

  private judge(): void {
    const { t, y, nt, ny } = this;
    const at = t[SIDE]!;
    for (let i = 0, n = 0; i < t.length; i++) {
      if (i === SIDE) continue;
      nt[n] = t[i]! - at;
      ny[n] = y[i]!;
      n++;
    }
    const error = this.value() - y[SIDE]!;
    this.square += error * error;
    this.count++;
  }

  private value(): number {
    const { nt, ny } = this;
    switch (this.guess) {
      case "nearest-sample":
        return nearestSampleAt(nt, ny, 0);
      case "straight-line":
        return straightLineAt(nt, ny, 0);
      case "monotone-cubic":
        return cubicAt(nt, ny, monotoneCubicSlopes(nt, ny), 0);
      case "local-cubic":
        return cubicAt(nt, ny, localCubicSlopes(nt, ny), 0);
    }
  }
}
