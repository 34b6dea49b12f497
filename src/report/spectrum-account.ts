/** From summed segment spectra to what the account says of a stage and channel. */
import type { CrossSpectra } from "../engine/cross-spectra.ts";
import { confidenceFactors, equivalentDegreesOfFreedom } from "../signal/chi-square.ts";
import { foldedFrequency } from "../signal/fold.ts";
import { gainAtBins } from "../signal/gain-at-bins.ts";
import { thirdOctaves } from "../signal/third-octaves.ts";
import { findTones } from "../signal/tones.ts";
import { bandPower, type SpectrumPlan } from "../signal/welch.ts";
import type { ReportSettings } from "../stages/stage.ts";
import type { BandAccount, SpectrumAccount, ToneAccount } from "./account-format.ts";

/** Chance of one false tone in a whole spectrum of noise. */
export const TONE_FALSE_ALARM = 0.001;
const PLOT_CELLS = 256;
/** A change of less than this share of a band's power is called kept. */
const KEPT_SHARE = 0.01;
const Z_95 = 1.959963984540054;

export interface Densities {
  readonly plan: SpectrumPlan;
  readonly segments: number;
  /** Mean square of the segments before the stage, taken in time. */
  readonly meanSquareIn: number;
  readonly degreesOfFreedom: number;
  readonly xx: Float64Array;
  readonly yy: Float64Array;
  readonly rr: Float64Array;
  /** Twice the real part of the one-sided cross density of output and removed. */
  readonly yr2: Float64Array;
  /** Gain that the data show, |Gxy| / Gxx; NaN where there is no input. */
  readonly gain: Float64Array;
}

/** One-sided densities, unit^2/Hz; null when no segment was gap-free on both sides. */
export function densities(plan: SpectrumPlan, cross: CrossSpectra): Densities | null {
  if (cross.segments === 0) return null;
  const scaled = (sums: Float64Array, factor = 1) =>
    sums.map((s, k) => (factor * s * plan.densityAt(k)) / cross.segments);
  return {
    plan,
    segments: cross.segments,
    meanSquareIn: cross.squareIn / cross.segments,
    degreesOfFreedom: equivalentDegreesOfFreedom(plan.windowCoefficients, plan.hop, cross.segments),
    xx: scaled(cross.xx),
    yy: scaled(cross.yy),
    rr: scaled(cross.rr),
    yr2: scaled(cross.yr, 2),
    gain: cross.xx.map((g, k) => Math.hypot(cross.xyRe[k]!, cross.xyIm[k]!) / g),
  };
}

export function bandAccounts(
  d: Densities,
  bands: ReportSettings["bands"],
  taps: Float64Array | null,
  octavesWanted = false,
): BandAccount[] {
  const width = d.plan.resolution_Hz;
  const nyquist = d.plan.frequency(d.plan.bins - 1);
  const predicted = taps === null ? null : gainAtBins(taps, d.plan.segment).map((g, k) => g * g * d.xx[k]!);
  const named = bands.length > 0 ? bands : [{ name: "all", from_Hz: 0, to_Hz: nyquist }];
  // Narrower than two bins, a third of an octave cannot be told from its neighbours.
  const octaves = octavesWanted
    ? thirdOctaves(8.7 * width, nyquist).map(({ centre_Hz, from_Hz, to_Hz }) => ({
        name: `third octave at ${Number(centre_Hz.toPrecision(3))} Hz`,
        from_Hz,
        to_Hz,
      }))
    : [];
  return [...named, ...octaves]
    .filter((band) => band.from_Hz < nyquist)
    .map((band) => {
      const to = Math.min(band.to_Hz, nyquist);
      const power = (density: Float64Array) => bandPower(density, width, band.from_Hz, to);
      const p_in = power(d.xx);
      const p_out = power(d.yy);
      const p_removed = power(d.rr);
      const cross = power(d.yr2);
      // A band narrower than a bin still rests on one bin's degrees of freedom.
      const freedom = d.degreesOfFreedom * Math.max(1, (to - band.from_Hz) / d.plan.enbw_Hz);
      return {
        name: band.name,
        from_Hz: band.from_Hz,
        to_Hz: to,
        p_in,
        p_out,
        p_removed,
        cross,
        closure: p_in > 0 ? (p_out + p_removed + cross - p_in) / p_in : null,
        predicted_out: predicted === null ? null : power(predicted),
        as_predicted: predicted === null ? null : agrees(p_out, power(predicted), freedom),
        degrees_of_freedom: freedom,
        finding: finding(p_in, p_out, p_removed, freedom),
      };
    });
}

/**
 * What can be said of a band: a change counts only where the 95 % interval of the ratio of two power
 * estimates with these degrees of freedom (normal approximation of its logarithm, variance 4 / nu) excludes
 * no change. The two come from the same segments, so the interval errs on the wide side.
 */
function finding(p_in: number, p_out: number, p_removed: number, freedom: number): string {
  if (!(p_in > 0)) return p_out > 0 ? "added" : "nothing there";
  if (p_removed < KEPT_SHARE * p_in) return "kept";
  const half = Z_95 * Math.sqrt(4 / freedom);
  const change = Math.log(p_out / p_in);
  if (change + half < 0) return "removed";
  if (change - half > 0) return "added";
  return "not resolved";
}

/** Within the 95 % interval of an estimate with these degrees of freedom about the prediction. */
function agrees(measured: number, predicted: number, freedom: number): boolean {
  const { lower, upper } = confidenceFactors(freedom, 0.95);
  return measured >= predicted / upper - Number.MIN_VALUE && measured <= predicted / lower + Number.MIN_VALUE;
}

export function toneAccounts(
  d: Densities,
  taps: Float64Array | null,
  keepEvery: number,
  most: number,
): ToneAccount[] {
  if (most === 0) return [];
  const rate = d.plan.frequency(d.plan.segment);
  const found = findTones(d.xx, {
    resolution_Hz: d.plan.resolution_Hz,
    enbw_Hz: d.plan.enbw_Hz,
    degreesOfFreedom: d.degreesOfFreedom,
    falseAlarm: TONE_FALSE_ALARM,
    windowCoefficients: d.plan.windowCoefficients,
    hop: d.plan.hop,
  });
  const gains = taps === null ? d.gain : gainAtBins(taps, d.plan.segment);
  return found.slice(0, most).map((tone) => {
    const gain = gains[Math.round(tone.frequency_Hz / d.plan.resolution_Hz)]!;
    const lands = foldedFrequency(tone.frequency_Hz, rate / keepEvery).frequency;
    const folds = tone.frequency_Hz > rate / keepEvery / 2;
    return {
      frequency_Hz: tone.frequency_Hz,
      amplitude: tone.amplitude,
      gain_dB: decibels(gain),
      lands_at_Hz: folds ? lands : tone.frequency_Hz,
      folds,
    };
  });
}

export function spectrumAccount(d: Densities, window: string): SpectrumAccount {
  const { plan } = d;
  const cells = plotCells(plan.bins);
  const mean = (density: Float64Array) =>
    cells.map(([from, to]) => {
      let sum = 0;
      for (let k = from; k < to; k++) sum += density[k]!;
      return sum / (to - from);
    });
  const total = bandPower(d.xx, plan.resolution_Hz, 0, plan.frequency(plan.bins - 1));
  return {
    window,
    overlap_pct: 50,
    segment_samples: plan.segment,
    resolution_Hz: plan.resolution_Hz,
    enbw_Hz: plan.enbw_Hz,
    segments: d.segments,
    degrees_of_freedom: d.degreesOfFreedom,
    interval_95: confidenceFactors(d.degreesOfFreedom, 0.95),
    integral_in: total,
    mean_square_in: d.meanSquareIn,
    frequency_Hz: cells.map(([from, to]) => (plan.frequency(from) + plan.frequency(to - 1)) / 2),
    psd_in: mean(d.xx),
    psd_out: mean(d.yy),
    psd_removed: mean(d.rr),
  };
}

/** Bins 1 … bins - 1 in at most 256 cells of about equal width in log frequency: [from, to). */
function plotCells(bins: number): [number, number][] {
  const cells: [number, number][] = [];
  const ratio = bins ** (1 / PLOT_CELLS);
  for (let from = 1; from < bins; ) {
    const to = Math.min(bins, Math.max(from + 1, Math.floor(from * ratio)));
    cells.push([from, to]);
    from = to;
  }
  return cells;
}

export const decibels = (gain: number): number => (gain > 0 ? 20 * Math.log10(gain) : -400);
