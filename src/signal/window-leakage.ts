/**
 * What a window does to a line and to neighbouring bins of noise.
 * References: F. J. Harris (1978), Proceedings of the IEEE 66, 51-83.
 */
import { RealTransform } from "./real-transform.ts";

/** A window is looked at by this many of its points at most: its shape in bins depends on no more. */
const POINTS = 1024;
/** Frequencies looked at per bin. */
const FINE = 8;

export class WindowLeakage {
  /** Bins of noise that are worth one independent bin: N sum w^4 / (sum w^2)^2, 1 for a flat window. */
  readonly binsAlike: number;
  private readonly bound: Float64Array;

  /** @param window  coefficients in the periodic form, at least 2 */
  constructor(window: Float64Array) {
    const stride = Math.max(1, Math.floor(window.length / POINTS));
    const n = Math.floor(window.length / stride);
    let second = 0;
    let fourth = 0;
    const padded = new Float64Array(n * FINE);
    for (let i = 0; i < n; i++) {
      const w = window[i * stride]!;
      padded[i] = w;
      second += w * w;
      fourth += w ** 4;
    }
    this.binsAlike = (n * fourth) / (second * second);
    const plan = new RealTransform(padded.length);
    const re = new Float64Array(plan.bins);
    const im = new Float64Array(plan.bins);
    plan.transform(padded, re, im);
    const power = re.map((r, k) => r * r + im[k]! * im[k]!);
    // A line lies up to half a bin beside its peak bin, which then shows power[FINE / 2] of it or more.
    const shown = power[FINE / 2]!;
    this.bound = new Float64Array(Math.max(1, Math.floor(n / 4)));
    for (let d = 0; d < this.bound.length; d++) {
      let most = 0;
      for (let j = Math.max(0, d * FINE - FINE / 2); j <= d * FINE + FINE / 2; j++)
        most = Math.max(most, power[j]!);
      this.bound[d] = most / shown;
    }
  }

  /**
   * Most that a line can show `distance` bins from its peak bin, as a share of its density in the peak bin.
   * Beyond the bins looked at: twice as much as the square of the distance leaves of it, which no window
   * exceeds (a flat one of n points shows 1 / (n sin(pi d / n))^2, 2 / n^2 at a quarter and 1 / n^2 at half).
   */
  shareAt(distance: number): number {
    const last = this.bound.length - 1;
    return distance <= last ? this.bound[distance]! : 2 * this.bound[last]! * (last / distance) ** 2;
  }
}
