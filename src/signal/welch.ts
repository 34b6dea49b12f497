/**
 * Power spectral density by Welch's method: overlapping windowed segments, each with its mean taken out,
 * their squared transforms averaged. One-sided, unit squared per Hz.
 * References: P. D. Welch (1967), IEEE Transactions on Audio and Electroacoustics 15, 70-73.
 */
import { RealTransform } from "./real-transform.ts";
import { type WindowKind, windowCoefficients } from "./windows.ts";

export interface SpectrumOptions {
  /** Samples in a segment, at least 2. */
  readonly segment: number;
  readonly window: WindowKind;
  readonly beta?: number;
  readonly samplingRate_Hz: number;
  /** Samples from one segment's start to the next; half a segment when left out. */
  readonly hop?: number;
  /** Whether each segment's mean is taken out first; true when left out. */
  readonly centre?: boolean;
}

/** All that the transforms of one node have in common. */
export class SpectrumPlan {
  readonly segment: number;
  readonly hop: number;
  readonly bins: number;
  readonly samplingRate_Hz: number;
  /** Bin spacing. */
  readonly resolution_Hz: number;
  /** Equivalent noise bandwidth of the window. */
  readonly enbw_Hz: number;
  readonly windowCoefficients: Float64Array;
  private readonly energy: number;
  private readonly centre: boolean;
  private readonly transform: RealTransform;
  private readonly work: Float64Array;

  constructor(options: SpectrumOptions) {
    const { segment, samplingRate_Hz } = options;
    this.segment = segment;
    this.samplingRate_Hz = samplingRate_Hz;
    this.hop = options.hop ?? Math.max(1, Math.floor(segment / 2));
    this.centre = options.centre ?? true;
    this.transform = new RealTransform(segment);
    this.bins = this.transform.bins;
    this.resolution_Hz = samplingRate_Hz / segment;
    this.windowCoefficients = windowCoefficients(options.window, segment, "periodic", options.beta);
    const sum = this.windowCoefficients.reduce((s, w) => s + w, 0);
    this.energy = this.windowCoefficients.reduce((s, w) => s + w * w, 0);
    this.enbw_Hz = (samplingRate_Hz * this.energy) / (sum * sum);
    this.work = new Float64Array(segment);
  }

  frequency(bin: number): number {
    return (bin * this.samplingRate_Hz) / this.segment;
  }

  /** Factor from |X[k]|^2 to the one-sided density: bins 0 and Nyquist stand for themselves, others for two. */
  densityAt(bin: number): number {
    const alone = bin === 0 || 2 * bin === this.segment;
    return (alone ? 1 : 2) / (this.samplingRate_Hz * this.energy);
  }

  /** Transform of one segment; re and im receive `bins` values. */
  spectrum(x: Float64Array, re: Float64Array, im: Float64Array): void {
    const { segment, windowCoefficients: w, work } = this;
    let mean = 0;
    if (this.centre) {
      // About the first sample, so that a constant leaves exactly nothing.
      for (let i = 0; i < segment; i++) mean += x[i]! - x[0]!;
      mean = x[0]! + mean / segment;
    }
    for (let i = 0; i < segment; i++) work[i] = (x[i]! - mean) * w[i]!;
    this.transform.transform(work, re, im);
  }
}

/** PSD of a whole gap-free record; samples after the last whole segment are left out. */
export function welch(x: Float64Array, options: SpectrumOptions): { psd: Float64Array; segments: number; plan: SpectrumPlan } {
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
 * width around k * width, and the whole of its power lies inside 0 to half the rate: the two end bins stand
 * for half a width, with double weight. Bins at the band's limits count pro rata, so neighbouring bands add up.
 */
export function bandPower(density: Float64Array, width: number, from: number, to: number): number {
  let sum = 0;
  const last = density.length - 1;
  for (let k = Math.max(0, Math.floor(from / width - 0.5)); k <= last; k++) {
    const low = Math.max(0, (k - 0.5) * width);
    const high = Math.min(last * width, (k + 0.5) * width);
    if (low >= to) break;
    const inside = Math.min(high, to) - Math.max(low, from);
    if (inside > 0) sum += density[k]! * width * (inside / (high - low));
  }
  return sum;
}
