/** The figures by which a filter is known, all in cycles/sample and samples. */
import { edgeFrequencies, gainAt, noiseBandwidth, peakGain, stepResponse } from "./response.ts";

export interface FilterFigures {
  readonly dc: number;
  readonly nyquist: number;
  /** Frequencies where the gain is 1, 3 and 6 dB below the largest: one for low- and high-pass, two for bands. */
  readonly f1: readonly number[];
  readonly f3: readonly number[];
  readonly f6: readonly number[];
  /** One-sided equivalent noise bandwidth. */
  readonly noiseBandwidth: number;
  /** 10-90 % rise of the step response; null when a constant does not pass. */
  readonly rise: number | null;
  /** Overshoot of the step response as a share of the step; null when a constant does not pass. */
  readonly overshoot: number | null;
}

export function filterFigures(taps: Float64Array): FilterFigures {
  if (taps.length > 2 && taps.every((w) => w === taps[0])) return equalWeightFigures(taps.length);
  const edges = edgeFrequencies(taps);
  const step = stepResponse(taps);
  return {
    dc: taps.reduce((sum, w) => sum + w, 0),
    nyquist: gainAt(taps, 0.5),
    f1: edges.f1,
    f3: edges.f3,
    f6: edges.f6,
    noiseBandwidth: noiseBandwidth(taps),
    rise: step.rise_10_90,
    overshoot: step.rise_10_90 === null ? null : step.overshoot,
  };
}

/** Gain of the mean of n samples: sin(pi n f) / (n sin(pi f)), 0 <= f <= 0.5; signed. */
export function meanGain(n: number, f: number): number {
  return f === 0 ? 1 : Math.sin(Math.PI * n * f) / (n * Math.sin(Math.PI * f));
}

/**
 * Closed forms for n equal weights, n > 2: long averages need no search over dense grids.
 * The step response is a ramp of n samples, so it rises from 10 to 90 % in 0.8 n.
 */
function equalWeightFigures(n: number): FilterFigures {
  const down = (gain: number) => {
    let low = 0;
    let high = 1 / n;
    for (let i = 0; i < 80; i++) {
      const middle = (low + high) / 2;
      if (meanGain(n, middle) > gain) low = middle;
      else high = middle;
    }
    return [(low + high) / 2];
  };
  return {
    dc: 1,
    nyquist: Math.abs(meanGain(n, 0.5)),
    f1: down(10 ** (-1 / 20)),
    f3: down(10 ** (-3 / 20)),
    f6: down(10 ** (-6 / 20)),
    noiseBandwidth: 1 / (2 * n),
    rise: 0.8 * n,
    overshoot: 0,
  };
}

/** Largest gain anywhere from `from` to 0.5, in dB; -400 for nothing. */
export function worstGain_dB(taps: Float64Array, from: number): { gain_dB: number; frequency: number } {
  const { gain, frequency } = peakGain(taps, from, 0.5);
  return { gain_dB: gain > 0 ? 20 * Math.log10(gain) : -400, frequency };
}
