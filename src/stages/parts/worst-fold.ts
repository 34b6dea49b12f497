import { convolveTaps } from "../../signal/convolve.ts";
import { foldedFrequency } from "../../signal/fold.ts";
import { peakGain } from "../../signal/response.ts";
import type { Signal } from "../stage.ts";

export interface WorstFold {
  readonly gain_dB: number;
  readonly source_Hz: number;
  readonly lands_Hz: number;
}

/**
 * Worst gain of anything that would fold into the band kept, 0 to share * new rate, over the channels.
 * The filters counted are those passed at the present rate, and the stage's own; filters passed before an
 * earlier decimation are left out, which errs on the side of caution unless they amplify.
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
  const rate = 1 / interval_s;
  const seen = new Set<string>();
  for (const channel of selected) {
    const filters = signal.filters[channel]!.filter((f) => f.interval_s === interval_s);
    const key = filters.map((f) => f.taps.length).join();
    if (seen.has(key)) continue;
    seen.add(key);
    let taps = own ?? Float64Array.of(1);
    // With a filter of the stage's own, what stands above is extra: it is not needed to meet the limit.
    if (own === null) for (const f of filters) taps = convolveTaps(taps, f.taps);
    for (let m = 1; m <= factor / 2 + share; m++) {
      const from = Math.max(0, (m - share) / factor);
      const to = Math.min(0.5, (m + share) / factor);
      if (from >= 0.5) break;
      const { gain, frequency } = peakGain(taps, from, to);
      const gain_dB = gain > 0 ? 20 * Math.log10(gain) : -400;
      if (gain_dB > worst.gain_dB) {
        const source_Hz = frequency * rate;
        worst = { gain_dB, source_Hz, lands_Hz: foldedFrequency(source_Hz, rate / factor).frequency };
      }
    }
  }
  return worst;
}
