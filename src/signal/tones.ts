/**
 * Spectral lines that stand out of the noise around them, at a stated rate of false alarms.
 *
 * A peak counts when it exceeds the noise floor (running median, see noise-floor.ts) by more than noise does
 * with the chance falseAlarm / (bins searched) (see tone-threshold.ts), stands clear of the bins beside it,
 * and is more than what the window leaks from a stronger line.
 *
 * Exact: for independent bins of Gaussian noise of even density, and segments that do not overlap, the chance
 * of a false tone in the whole spectrum is at most `falseAlarm`; the median's bias and its own spread are
 * counted in full.
 * Approximate: the heavier tail that overlapping segments give (within a few per cent, overlap-tail.ts); the
 * likeness that a window makes between neighbouring bins, counted as fewer independent neighbours (fewer by
 * the sum of the bins' squared correlations); a sloping spectrum shifts the median a little; a hump narrower
 * than some 20 bins counts as a line. The tone's amplitude assumes the peak's floor for the whole main lobe,
 * and with a flat window misses what leaks beyond it (up to 10 %, with other windows below 2 %).
 * References: R. B. Blackman & J. W. Tukey (1958), The Measurement of Power Spectra; M. Gasior & J. L.
 * Gonzalez (2004), AIP Conference Proceedings 732, 276-285 (parabola through logarithms). Recalled from memory.
 */
import { HALF_WINDOW, NoiseFloor } from "./noise-floor.ts";
import { OverlapTail } from "./overlap-tail.ts";
import { median } from "./robust.ts";
import { medianShare, toneThreshold } from "./tone-threshold.ts";
import { WindowLeakage } from "./window-leakage.ts";
import { windowCoefficients } from "./windows.ts";

export interface ToneSearch {
  /** Bin spacing. */
  readonly resolution_Hz: number;
  /** Equivalent noise bandwidth of the window. */
  readonly enbw_Hz: number;
  /** Of the density at one bin. */
  readonly degreesOfFreedom: number;
  /** Chance of at least one false tone in a spectrum of noise, 0 < p < 0.5. */
  readonly falseAlarm: number;
  /** The window of the estimate in its periodic form; Hann when left out. */
  readonly windowCoefficients?: Float64Array;
  /** Samples from one segment's start to the next, in points of that window; half of it when left out. */
  readonly hop?: number;
}

export interface Tone {
  readonly frequency_Hz: number;
  /** Peak amplitude of the sine wave, from the line's power above the floor. */
  readonly amplitude: number;
  /** Density at the peak over the floor. */
  readonly ratio: number;
}

/** Bins 0, 1 and 2 hold the mean and what leaks from it and from slow drift. */
export const FIRST_TONE_BIN = 3;
/** Bins on either side, outside the main lobe, that a line must stand out of too, and the chance there. */
const NEAR = 10;
const NEAR_CHANCE = 1e-3;
/**
 * A line beside a stronger one shows more than this many times what the stronger one can leak there: near zero
 * and the Nyquist frequency its image leaks as much, and the two may add in phase.
 */
const CLEAR = 4;
/** What rounding leaves in a bin, as a share of the whole power, generously. */
const ROUNDING = 1e-30;

/** What spectra of one kind have in common: made once, it searches any number of them. */
export class ToneFinder {
  private readonly search: ToneSearch;
  private readonly lobe: number;
  private readonly share: number;
  private readonly leakage: WindowLeakage;
  private readonly tail: OverlapTail;
  private readonly thresholds = new Map<string, number>();

  /** @throws RangeError when the false-alarm rate is out of its range */
  constructor(search: ToneSearch) {
    if (!(search.falseAlarm > 0 && search.falseAlarm < 0.5))
      throw new RangeError(`false-alarm rate ${search.falseAlarm} is not in 0 to 0.5`);
    this.search = search;
    // Bins on either side of a peak that a line fills: 2 for Hann and Hamming, 3 for Blackman.
    this.lobe = Math.max(2, Math.ceil((2 * search.enbw_Hz) / search.resolution_Hz - 1 - 1e-6));
    this.share = medianShare(search.degreesOfFreedom);
    const window = search.windowCoefficients ?? windowCoefficients("hann", 1024, "periodic");
    const hop = search.hop ?? Math.ceil(window.length / 2);
    this.leakage = new WindowLeakage(window);
    this.tail = new OverlapTail(window, hop, search.degreesOfFreedom);
  }

  /** Ratio to the floor above which a peak counts, in a spectrum of so many bins, away from its ends. */
  threshold(bins: number): number {
    const neighbours = Math.min(2 * HALF_WINDOW, bins - 2 - FIRST_TONE_BIN) - 2 * this.lobe;
    return this.thresholdOf(neighbours, this.search.falseAlarm / (bins - 1 - FIRST_TONE_BIN));
  }

  /** See findTones. */
  find(psd: Float64Array): Tone[] {
    const { lobe, share, search } = this;
    const noise = new NoiseFloor(psd, FIRST_TONE_BIN, lobe);
    if (!noise.enough) return [];
    const chance = search.falseAlarm / (psd.length - 1 - FIRST_TONE_BIN);
    let least = 0;
    for (const p of psd) least += p * ROUNDING;
    const peaks: Peak[] = [];
    for (let k = FIRST_TONE_BIN; k < psd.length - 1; k++) {
      const p = psd[k]!;
      if (p < psd[k - 1]! || p <= psd[k + 1]!) continue;
      const floor = Math.max(least, noise.medianAt(k) / share);
      const threshold = this.thresholdOf(noise.neighbours(k), chance);
      if (!(p > floor * threshold)) continue;
      // On a hump or a skirt a ripple may pass the floor; a line stands out of its near surroundings too, and
      // has a valley on either side.
      const near = (this.thresholdOf(2 * NEAR, NEAR_CHANCE) * nearMedian(psd, k, lobe)) / share;
      if (p > near && p > Math.sqrt(threshold) * shoulder(psd, k, lobe)) peaks.push({ bin: k, floor });
    }
    return this.withoutLeakage(psd, peaks)
      .map(({ bin, floor }) => ({
        frequency_Hz: (bin + offset(psd, bin)) * search.resolution_Hz,
        amplitude: Math.sqrt(2 * linePower(psd, bin, floor, lobe) * search.resolution_Hz),
        ratio: psd[bin]! / floor,
      }))
      .sort((a, b) => b.amplitude - a.amplitude || a.frequency_Hz - b.frequency_Hz);
  }

  private withoutLeakage(psd: Float64Array, peaks: Peak[]): Peak[] {
    const kept: Peak[] = [];
    for (const peak of peaks.sort((a, b) => psd[b.bin]! - psd[a.bin]! || a.bin - b.bin)) {
      const leaks = (line: Peak) => psd[line.bin]! * this.leakage.shareAt(Math.abs(line.bin - peak.bin));
      if (kept.every((line) => psd[peak.bin]! > CLEAR * leaks(line))) kept.push(peak);
    }
    return kept;
  }

  private thresholdOf(neighbours: number, chance: number): number {
    const key = `${neighbours} ${chance}`;
    let t = this.thresholds.get(key);
    if (t === undefined) {
      const independent = Math.max(2, neighbours / this.leakage.binsAlike);
      t = toneThreshold(this.search.degreesOfFreedom, independent, chance, (x) => this.tail.above(x));
      this.thresholds.set(key, t);
    }
    return t;
  }
}

interface Peak {
  readonly bin: number;
  readonly floor: number;
}

/**
 * @param psd  one-sided density, all finite, bin k at k * resolution; the last bin (the Nyquist frequency of an
 *             even segment) is not searched
 * @returns tones, strongest first; none when there are too few bins to tell a line from noise
 * @throws RangeError when the false-alarm rate is out of its range
 */
export function findTones(psd: Float64Array, search: ToneSearch): Tone[] {
  return new ToneFinder(search).find(psd);
}

/** Median of the nearest bins outside the main lobe: on a broad hump or a skirt it is higher than the floor. */
function nearMedian(psd: Float64Array, k: number, lobe: number): number {
  const near: number[] = [];
  for (let d = lobe + 1; d <= lobe + NEAR; d++) {
    if (k - d >= FIRST_TONE_BIN) near.push(psd[k - d]!);
    if (k + d < psd.length - 1) near.push(psd[k + d]!);
  }
  return median(near);
}

/** The higher of the two sides' lowest values in the three bins beyond the main lobe. */
function shoulder(psd: Float64Array, k: number, lobe: number): number {
  let below = Number.POSITIVE_INFINITY;
  let above = Number.POSITIVE_INFINITY;
  for (let d = lobe + 1; d <= lobe + 3; d++) {
    below = Math.min(below, psd[Math.max(0, k - d)]!);
    above = Math.min(above, psd[Math.min(psd.length - 1, k + d)]!);
  }
  return Math.max(below, above);
}

/** Place of the peak between the bins, within half a bin: vertex of the parabola through the three logarithms. */
function offset(psd: Float64Array, k: number): number {
  const [a, b, c] = [Math.log(psd[k - 1]!), Math.log(psd[k]!), Math.log(psd[k + 1]!)];
  const d = (a - c) / (2 * (a - 2 * b + c));
  return Number.isFinite(d) ? Math.max(-0.5, Math.min(0.5, d)) : 0;
}

/** Sum of the density above the floor over the main lobe; at the least the peak's own. */
function linePower(psd: Float64Array, k: number, floor: number, lobe: number): number {
  let sum = 0;
  for (let j = Math.max(1, k - lobe); j <= Math.min(psd.length - 1, k + lobe); j++) sum += psd[j]! - floor;
  return Math.max(sum, psd[k]! - floor);
}
