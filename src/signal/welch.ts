/**
 * Power spectral density by Welch's method: overlapping windowed segments, each with its mean taken out,
 * their squared transforms averaged. One-sided, unit squared per Hz.
 * References: P. D. Welch (1967), IEEE Transactions on Audio and Electroacoustics 15, 70-73; F. J. Harris
 * (1978), Proceedings of the IEEE 66, 51-83, eq. 11 (equivalent noise bandwidth).
 */
import { RealTransform } from "./real-transform.ts";
import { type WindowKind, windowCoefficients } from "./windows.ts";

export { confidenceFactors, equivalentDegreesOfFreedom } from "./chi-square.ts";

export interface SpectrumOptions {
  /** Samples in a segment, at least 2; a power of two is fastest. */
  readonly segment: number;
  /** Taken in its periodic form. */
  readonly window: WindowKind;
  /** Shape of the Kaiser window. */
  readonly beta?: number;
  readonly samplingRate_Hz: number;
  /** Samples from one segment's start to the next, at least 1; half a segment (rounded up) when left out. */
  readonly hop?: number;
  /** What is taken out of each segment before it is windowed; its mean when left out. */
  readonly takenOut?: "nothing" | "mean" | "line";
}

/** All that the transforms of one node have in common. Work space is kept from call to call. */
export class SpectrumPlan {
  readonly segment: number;
  readonly hop: number;
  /** Frequencies in a spectrum: floor(segment / 2) + 1. */
  readonly bins: number;
  readonly samplingRate_Hz: number;
  /** Bin spacing, samplingRate / segment. */
  readonly resolution_Hz: number;
  /** Equivalent noise bandwidth of the window: rate * sum w^2 / (sum w)^2. */
  readonly enbw_Hz: number;
  /** 1 / (rate * sum w^2): |X[k]|^2 times this, doubled but at zero and Nyquist, is the one-sided density. */
  readonly densityScale: number;
  readonly windowCoefficients: Float64Array;
  private readonly energy: number;
  private readonly takenOut: "nothing" | "mean" | "line";
  private readonly transform: RealTransform;
  private readonly work: Float64Array;

  /** @throws RangeError when a length or the rate is out of its range */
  constructor(options: SpectrumOptions) {
    const { segment, samplingRate_Hz } = options;
    if (!(Number.isInteger(segment) && segment >= 2))
      throw new RangeError(`segment of ${segment} samples is not a whole number >= 2`);
    if (!(samplingRate_Hz > 0 && samplingRate_Hz < Number.POSITIVE_INFINITY))
      throw new RangeError(`sampling rate ${samplingRate_Hz} Hz is not > 0`);
    this.segment = segment;
    this.samplingRate_Hz = samplingRate_Hz;
    this.hop = options.hop ?? Math.ceil(segment / 2);
    if (!(Number.isInteger(this.hop) && this.hop >= 1))
      throw new RangeError(`hop of ${this.hop} samples is not a whole number >= 1`);
    this.takenOut = options.takenOut ?? "mean";
    this.transform = new RealTransform(segment);
    this.bins = this.transform.bins;
    this.resolution_Hz = samplingRate_Hz / segment;
    this.windowCoefficients = windowCoefficients(options.window, segment, "periodic", options.beta);
    const sum = this.windowCoefficients.reduce((s, w) => s + w, 0);
    this.energy = this.windowCoefficients.reduce((s, w) => s + w * w, 0);
    this.enbw_Hz = (samplingRate_Hz * this.energy) / (sum * sum);
    this.densityScale = 1 / (samplingRate_Hz * this.energy);
    this.work = new Float64Array(segment);
  }

  frequency(bin: number): number {
    return (bin * this.samplingRate_Hz) / this.segment;
  }

  /** Factor from |X[k]|^2 to the one-sided density: bins 0 and Nyquist stand for themselves, others for two. */
  densityAt(bin: number): number {
    return bin === 0 || 2 * bin === this.segment ? this.densityScale : 2 * this.densityScale;
  }

  /**
   * Transform of one segment.
   * @param x       `segment` samples, all finite
   * @param re, im  receive `bins` values each
   * @returns the segment's mean square as the window weights it, sum (w x)^2 / sum w^2, taken in time: the
   *          integral of the segment's density equals it (Parseval's theorem)
   */
  spectrum(x: Float64Array, re: Float64Array, im: Float64Array): number {
    const { segment, windowCoefficients: w, work, takenOut } = this;
    const centre = (segment - 1) / 2;
    let mean = 0;
    let slope = 0;
    if (takenOut !== "nothing") {
      // About the first sample, so that a constant leaves exactly nothing.
      const pivot = x[0]!;
      for (let i = 0; i < segment; i++) {
        mean += x[i]! - pivot;
        slope += (i - centre) * (x[i]! - pivot);
      }
      mean = pivot + mean / segment;
      slope = takenOut === "line" ? slope / ((segment * (segment * segment - 1)) / 12) : 0;
    }
    let square = 0;
    for (let i = 0; i < segment; i++) {
      const v = (x[i]! - mean - slope * (i - centre)) * w[i]!;
      work[i] = v;
      square += v * v;
    }
    this.transform.transform(work, re, im);
    return square / this.energy;
  }
}

export interface DensityEstimate {
  /** Bin k at plan.frequency(k), unit squared per Hz. */
  readonly psd: Float64Array;
  readonly segments: number;
  readonly plan: SpectrumPlan;
}

/**
 * PSD of a whole gap-free record, all samples finite. Samples after the last whole segment are left out; of a
 * record shorter than a segment the density is zero and `segments` says 0.
 */
export function welch(x: Float64Array, options: SpectrumOptions): DensityEstimate {
  const plan = new SpectrumPlan(options);
  const psd = new Float64Array(plan.bins);
  const re = new Float64Array(plan.bins);
  const im = new Float64Array(plan.bins);
  let segments = 0;
  for (let from = 0; from + plan.segment <= x.length; from += plan.hop, segments++) {
    plan.spectrum(x.subarray(from, from + plan.segment), re, im);
    for (let k = 0; k < plan.bins; k++) psd[k]! += re[k]! * re[k]! + im[k]! * im[k]!;
  }
  for (let k = 0; k < plan.bins; k++) psd[k]! *= plan.densityAt(k) / Math.max(1, segments);
  return { psd, segments, plan };
}

/**
 * Integral of a one-sided density over [from, to], in unit squared. Bin k stands for the stretch of one bin
 * width around k * width, cut off at zero and at the Nyquist frequency; the power of a bin is density * width
 * and lies evenly over its stretch, so the two end bins hold theirs on half a width. Bins at the band's limits
 * count pro rata: adjacent bands add up to the whole within rounding, and the whole, sum of density * width,
 * is the mean square of what was transformed.
 * @param density  bins 0 … last
 * @param width    bin spacing
 * @param from, to from <= to; what lies outside 0 to `nyquist` holds nothing
 * @param nyquist  half the sampling rate; the last bin's frequency when left out. With an odd segment that
 *                 is half a width less than half the rate: give it then
 */
export function bandPower(
  density: Float64Array,
  width: number,
  from: number,
  to: number,
  nyquist = (density.length - 1) * width,
): number {
  if (!(from <= to)) throw new RangeError(`band from ${from} to ${to} is turned round`);
  let sum = 0;
  for (let k = Math.max(0, Math.floor(from / width - 0.5)); k < density.length; k++) {
    const low = Math.max(0, (k - 0.5) * width);
    const high = Math.min(nyquist, (k + 0.5) * width);
    if (low >= to) break;
    const inside = Math.min(high, to) - Math.max(low, from);
    if (inside > 0) sum += density[k]! * width * (inside / (high - low));
  }
  return sum;
}
