/**
 * Spectral lines that stand out of the noise around them, at a stated rate of false alarms.
 * The floor at a bin is the running median of its neighbours, divided by the median of the estimate's own
 * distribution; a peak counts when it exceeds the floor by the chi-square quantile at which one false alarm
 * in the whole spectrum has the stated chance, widened for the uncertainty of the median itself.
 * Exact for independent bins of noise that is even over the window; approximate where the spectrum is steep
 * or the window's main lobe makes neighbours alike (fewer independent bins: errs on the side of silence).
 * References: R. B. Blackman & J. W. Tukey (1958), The Measurement of Power Spectra (chi-square estimates).
 */
import { chiSquareQuantile } from "./chi-square.ts";

export interface ToneSearch {
  /** Bin spacing. */
  readonly resolution_Hz: number;
  readonly enbw_Hz: number;
  readonly degreesOfFreedom: number;
  /** Chance of at least one false tone in a spectrum of noise, 0 < p < 1. */
  readonly falseAlarm: number;
}

export interface Tone {
  readonly frequency_Hz: number;
  /** Peak amplitude of the sine wave, from the power above the floor. */
  readonly amplitude: number;
  /** Density at the peak over the floor. */
  readonly ratio: number;
}

/** Bins next to zero that a mean or a slow drift fills. */
const FIRST_BIN = 4;
const WIDEST_HALF = 48;
/** Bins on either side of a peak that hold its power (main lobe of the usual windows). */
const LOBE = 2;

/** @param psd one-sided density, bin k at k * resolution. Strongest first. */
export function findTones(psd: Float64Array, search: ToneSearch): Tone[] {
  const { degreesOfFreedom: dof, resolution_Hz } = search;
  const bins = psd.length;
  const candidates = Math.max(1, bins - FIRST_BIN);
  const limit = chiSquareQuantile(1 - search.falseAlarm / candidates, dof) / dof;
  const bias = chiSquareQuantile(0.5, dof) / dof;
  const tones: Tone[] = [];
  for (let k = FIRST_BIN; k < bins - 1; k++) {
    const p = psd[k]!;
    if (!(p > 0) || p < psd[k - 1]! || p <= psd[k + 1]!) continue;
    const around = neighbours(psd, k);
    if (around.length < 6) continue;
    const floor = median(around) / bias;
    // Standard error of a median, neighbours counted as two alike.
    const margin = 1 + (3 * 1.2533 * Math.sqrt(2 / dof)) / Math.sqrt(around.length / 2);
    if (!(p > floor * limit * margin)) continue;
    let power = 0;
    let moment = 0;
    for (let j = Math.max(0, k - LOBE); j <= Math.min(bins - 1, k + LOBE); j++) {
      const excess = Math.max(0, psd[j]! - floor) * resolution_Hz;
      power += excess;
      moment += excess * j;
    }
    tones.push({
      frequency_Hz: (moment / power) * resolution_Hz,
      amplitude: Math.sqrt(2 * power),
      ratio: floor > 0 ? p / floor : Number.POSITIVE_INFINITY,
    });
  }
  return tones.sort((a, b) => b.amplitude - a.amplitude || a.frequency_Hz - b.frequency_Hz);
}

/**
 * Neighbours as far below as above in log frequency, so that the median of a sloping spectrum is its value
 * at k; the peak's own main lobe is left out.
 */
function neighbours(psd: Float64Array, k: number): number[] {
  const up = Math.min(WIDEST_HALF, Math.max(6, Math.ceil(0.6 * k)));
  const down = Math.min(WIDEST_HALF, k - 1, Math.max(3, Math.floor(k - k / (1 + up / k))));
  const out: number[] = [];
  for (let j = k - down; j <= Math.min(psd.length - 1, k + up); j++) if (Math.abs(j - k) > LOBE) out.push(psd[j]!);
  return out;
}

function median(list: number[]): number {
  list.sort((a, b) => a - b);
  const half = list.length >> 1;
  return list.length % 2 === 1 ? list[half]! : (list[half - 1]! + list[half]!) / 2;
}
