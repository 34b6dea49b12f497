/**
 * Symmetry of taps, and the delay that follows from it or from the phase.
 * References: A. V. Oppenheim & R. W. Schafer, Discrete-Time Signal Processing, sections 5.1 and 5.7 (group delay,
 * linear phase; recalled from memory). Group delay of taps h: Re(sum n h[n] e^(-iwn) / sum h[n] e^(-iwn)).
 */
import { responseAt } from "./frequency-response.ts";
import { responseAtBins } from "./gain-at-bins.ts";

/** Symmetry of the taps to within rounding of the largest. */
export function symmetryOf(taps: Float64Array): "even" | "odd" | "none" {
  const n = taps.length;
  const near = 4 * Number.EPSILON * taps.reduce((m, w) => Math.max(m, Math.abs(w)), 0);
  const all = (sign: 1 | -1) => taps.every((w, i) => Math.abs(w - sign * taps[n - 1 - i]!) <= near);
  if (all(1)) return "even";
  return all(-1) ? "odd" : "none";
}

export interface GroupDelay {
  /** Samples: (N - 1) / 2 of symmetric taps; else at zero frequency, or where that hardly passes, at the strongest. */
  readonly samples: number;
  /** The same at all frequencies. */
  readonly constant: boolean;
  /** Over the passband: where the gain is at least half its peak. */
  readonly lowest: number;
  readonly highest: number;
}

/** Delay at one frequency, in samples; null where the filter passes nothing, and so delays nothing. */
export function groupDelayAt(taps: Float64Array, f: number): number | null {
  const h = responseAt(taps, f);
  const power = h.re * h.re + h.im * h.im;
  const rounding = Number.EPSILON * taps.reduce((sum, w) => sum + Math.abs(w), 0);
  if (Math.sqrt(power) <= 64 * rounding) return null;
  if (symmetryOf(taps) !== "none") return (taps.length - 1) / 2;
  const ramp = responseAt(
    taps.map((w, n) => w * n),
    f,
  );
  return (ramp.re * h.re + ramp.im * h.im) / power;
}

/** Constant for symmetric taps; else the range over the passband, seen at 16 or more frequencies a tap. */
export function groupDelayOf(taps: Float64Array): GroupDelay {
  if (symmetryOf(taps) !== "none") {
    const half = (taps.length - 1) / 2;
    return { samples: half, constant: true, lowest: half, highest: half };
  }
  const size = 2 ** Math.ceil(Math.log2(Math.max(1024, 32 * taps.length)));
  const h = responseAtBins(taps, size);
  const ramp = responseAtBins(
    taps.map((w, n) => w * n),
    size,
  );
  const power = h.re.map((re, k) => re * re + h.im[k]! * h.im[k]!);
  let strongest = 0;
  for (let k = 1; k < power.length; k++) if (power[k]! > power[strongest]!) strongest = k;
  const enough = power[strongest]! / 4;
  let lowest = Number.POSITIVE_INFINITY;
  let highest = Number.NEGATIVE_INFINITY;
  for (let k = 0; k < power.length; k++) {
    if (power[k]! < enough) continue;
    const delay = (ramp.re[k]! * h.re[k]! + ramp.im[k]! * h.im[k]!) / power[k]!;
    lowest = Math.min(lowest, delay);
    highest = Math.max(highest, delay);
  }
  const at = power[0]! >= enough ? 0 : strongest / size;
  return { samples: groupDelayAt(taps, at)!, constant: highest - lowest < 1e-9, lowest, highest };
}
