/**
 * Delay as the data show it: the place of the highest cross-correlation of input and output, from their
 * averaged cross spectrum, which is aligned by the stated delay already.
 * References: C. H. Knapp & G. C. Carter (1976), IEEE Transactions on Acoustics, Speech, and Signal Processing
 * 24, 320-327 (delay from the cross-correlation's peak; recalled from memory).
 */
import type { CrossSpectra } from "../engine/cross-spectra.ts";

export interface MeasuredDelay {
  /** Samples beyond the stated delay: 0 where the two agree. */
  readonly beyond_samples: number;
  /** Correlation coefficient at the peak, -1 to 1. */
  readonly correlation: number;
}

const FARTHEST = 64;

/** null without segments, or where the output is nothing. */
export function measuredDelay(cross: CrossSpectra): MeasuredDelay | null {
  if (cross.segments === 0) return null;
  const last = cross.xx.length - 1;
  const size = 2 * last;
  const total = (power: Float64Array) =>
    power.reduce((sum, p, k) => sum + (k === 0 || k === last ? 1 : 2) * p, 0);
  const scale = Math.sqrt(total(cross.xx) * total(cross.yy));
  if (!(scale > 0)) return null;
  const at = (lag: number) => {
    let sum = 0;
    for (let k = 0; k <= last; k++) {
      const angle = (2 * Math.PI * ((k * lag) % size)) / size;
      const part = cross.xyRe[k]! * Math.cos(angle) - cross.xyIm[k]! * Math.sin(angle);
      sum += k === 0 || k === last ? part : 2 * part;
    }
    return sum / scale;
  };
  const farthest = Math.min(FARTHEST, Math.floor(size / 4));
  let best = 0;
  let peak = at(0);
  for (let lag = 1; lag <= farthest; lag++)
    for (const side of [lag, -lag]) {
      const r = at(side);
      // A tie, as in a pure sine that repeats, goes to the lag nearest to the stated delay.
      if (r > peak + 1e-12) {
        peak = r;
        best = side;
      }
    }
  const [a, c] = [at(best - 1), at(best + 1)];
  const bend = a - 2 * peak + c;
  const shift = bend < 0 ? (0.5 * (a - c)) / bend : 0;
  return { beyond_samples: best + Math.max(-0.5, Math.min(0.5, shift)), correlation: peak };
}
