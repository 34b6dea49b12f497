/** The noise around each bin of a spectrum, by medians that lines do not lift. */
import { median } from "./robust.ts";
import { SortedWindow } from "./sorted-window.ts";

/** Bins on either side of the one looked at, where there are so many. */
export const HALF_WINDOW = 48;
/** A median of fewer neighbours says too little. */
const FEWEST = 12;

/**
 * Walks up a spectrum. At a bin in the middle of its window as many neighbours lie below as above, so that
 * the median follows any slope. Near the ends of the spectrum the window is the nearest one of the same
 * length, and the median stands for its middle: there the floor is the larger of it and the power law through
 * the medians of the window's two halves, which errs on the side of a high floor.
 */
export class NoiseFloor {
  private readonly psd: Float64Array;
  private readonly from: number;
  private readonly to: number;
  private readonly lobe: number;
  private readonly window = new SortedWindow();
  private low: number;
  private high: number;

  /**
   * @param psd   density, all finite
   * @param from  first bin of noise, >= 1
   * @param lobe  bins on either side of the one looked at that are left out, since a line fills them
   */
  constructor(psd: Float64Array, from: number, lobe: number) {
    this.psd = psd;
    this.from = from;
    this.to = psd.length - 2;
    this.lobe = lobe;
    this.low = from;
    this.high = from - 1;
  }

  /** Whether there are neighbours enough for any floor at all. */
  get enough(): boolean {
    return this.to - this.from - 2 * this.lobe >= FEWEST;
  }

  /** Neighbours under the median at a bin. */
  neighbours(k: number): number {
    const [low, high] = this.reach(k);
    return high - low + 1 - (Math.min(high, k + this.lobe) - Math.max(low, k - this.lobe) + 1);
  }

  /** Median of the neighbours at bin k, not yet divided by its share of the density; k must not fall. */
  medianAt(k: number): number {
    const { psd, window, lobe } = this;
    const [low, high] = this.reach(k);
    while (this.high < high) window.add(psd[++this.high]!);
    while (this.low < low) window.remove(psd[this.low++]!);
    const first = Math.max(low, k - lobe);
    const last = Math.min(high, k + lobe);
    for (let j = first; j <= last; j++) window.remove(psd[j]!);
    const middle = window.median();
    for (let j = first; j <= last; j++) window.add(psd[j]!);
    return k - low === high - k ? middle : Math.max(middle, this.powerLaw(k, low, high));
  }

  private reach(k: number): [number, number] {
    const low = Math.max(this.from, Math.min(k - HALF_WINDOW, this.to - 2 * HALF_WINDOW));
    return [low, Math.min(this.to, low + 2 * HALF_WINDOW)];
  }

  /** Through the medians of the lower and the upper half of the window, at the halves' middle bins. */
  private powerLaw(k: number, low: number, high: number): number {
    const cut = (low + high) >>> 1;
    const part = (a: number, b: number) => {
      const values: number[] = [];
      const logs: number[] = [];
      for (let j = a; j <= b; j++)
        if (Math.abs(j - k) > this.lobe) {
          values.push(this.psd[j]!);
          logs.push(Math.log(j));
        }
      return { level: Math.log(median(values)), at: median(logs) };
    };
    const a = part(low, cut);
    const b = part(cut + 1, high);
    const at = a.level + ((b.level - a.level) / (b.at - a.at)) * (Math.log(k) - a.at);
    // Of a density of nothing there is no logarithm.
    return Number.isFinite(at) ? Math.exp(at) : 0;
  }
}
