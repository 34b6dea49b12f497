/**
 * The figures by which a window is chosen for spectra.
 * References: F. J. Harris (1978), Proceedings of the IEEE 66, 51-83, table 1 (recalled from memory): highest side
 * lobe, scalloping loss (loss half-way between bins), widths of the main lobe. One bin = sampling rate / N.
 */
import { gainAt } from "./frequency-response.ts";
import { GainCurve } from "./gain-curve.ts";

/** Share of the centre's gain below which a dip ends the main lobe. */
const DEEP = 0.25;

export interface WindowLobes {
  /** Largest gain beyond the first null, relative to the centre; null when there is no null before the Nyquist frequency. */
  readonly highestSideLobe_dB: number | null;
  /** Loss of a tone half-way between two bins; positive. */
  readonly scallopingLoss_dB: number;
  /** Full width of the main lobe, in bins, at exactly -3 dB and -6 dB. */
  readonly width_3dB_bins: number | null;
  readonly width_6dB_bins: number | null;
  /** Cycles/sample; null when there is none. */
  readonly firstNull: number | null;
}

/** @param w  at least 2 points, with a sum other than 0 */
export function windowLobes(w: Float64Array): WindowLobes {
  const curve = new GainCurve(w);
  const centre = gainAt(w, 0);
  const dB = (gain: number) => 20 * Math.log10(gain / centre);
  // The top of a flat-top window waves a little: a null is deep.
  const deep = (centre * DEEP) ** 2;
  let k = 1;
  while (k < curve.power.length && (curve.power[k]! <= curve.power[k - 1]! || curve.power[k - 1]! > deep))
    k++;
  const rises = k < curve.power.length;
  const firstNull = rises
    ? curve.lowest(Math.max(0, (k - 2) / curve.size), Math.min(0.5, k / curve.size)).frequency
    : null;
  const width = (down_dB: number): number | null => {
    const least = centre * 10 ** (-down_dB / 20);
    let [low, high] = [0, firstNull ?? 0.5];
    if (gainAt(w, high) >= least) return null;
    for (let i = 0; i < 60; i++) {
      const middle = (low + high) / 2;
      if (gainAt(w, middle) >= least) low = middle;
      else high = middle;
    }
    return 2 * w.length * low;
  };
  return {
    highestSideLobe_dB: firstNull === null ? null : dB(curve.peak(firstNull, 0.5).gain),
    scallopingLoss_dB: -dB(gainAt(w, 0.5 / w.length)),
    width_3dB_bins: width(3),
    width_6dB_bins: width(6),
    firstNull,
  };
}
