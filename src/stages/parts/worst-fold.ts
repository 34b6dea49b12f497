import { convolveTaps } from "../../signal/convolve.ts";
import { foldedFrequency } from "../../signal/fold.ts";
import { GainCurve } from "../../signal/response.ts";
import type { Signal } from "../stage.ts";

/** Stands for all or nothing. */
const LARGEST_dB = 400;

export interface WorstFold {
  readonly gain_dB: number;
  readonly source_Hz: number;
  readonly lands_Hz: number;
}

/**
 * Worst gain of anything that would fold into the band kept, 0 to share * new rate, against the largest gain
 * inside that band, over the channels. The filters counted are those passed at the present rate, or the stage's
 * own; filters passed before an earlier decimation are left out, which errs on the side of caution unless they
 * amplify.
 */
export function worstFold(
  signal: Signal,
  selected: readonly number[],
  own: Float64Array | null,
  interval_s: number,
  factor: number,
  share: number,
): WorstFold {
  let worst: WorstFold = { gain_dB: Number.NEGATIVE_INFINITY, source_Hz: 0, lands_Hz: 0 };
  // With a filter of the stage's own, what stands above is extra: it is not needed to meet the limit.
  const series = own === null ? seriesOfFilters(signal, selected, interval_s) : [[own]];
  for (const filters of series) {
    const taps = filters.reduce(convolveTaps, Float64Array.of(1));
    const curve = new GainCurve(taps);
    const kept = curve.peak(0, share / factor).gain;
    for (let m = 1; m <= factor / 2 + share; m++) {
      const from = Math.max(0, (m - share) / factor);
      const to = Math.min(0.5, (m + share) / factor);
      if (from >= 0.5) break;
      const { gain, frequency } = curve.peak(from, to);
      const gain_dB = gain > 0 ? Math.min(LARGEST_dB, 20 * Math.log10(gain / kept)) : -LARGEST_dB;
      if (gain_dB > worst.gain_dB) {
        const source_Hz = frequency / interval_s;
        const newRate = 1 / interval_s / factor;
        worst = { gain_dB, source_Hz, lands_Hz: foldedFrequency(source_Hz, newRate).frequency };
      }
    }
  }
  return worst;
}

/** The filters of each selected channel at the present rate; channels with the same ones count once. */
function seriesOfFilters(signal: Signal, selected: readonly number[], interval_s: number): Float64Array[][] {
  const found: Float64Array[][] = [];
  for (const channel of selected) {
    const filters = signal.filters[channel]!.filter((f) => f.interval_s === interval_s).map((f) => f.taps);
    const same = (other: Float64Array[]) =>
      other.length === filters.length && other.every((taps, i) => taps === filters[i]);
    if (!found.some(same)) found.push(filters);
  }
  return found;
}
