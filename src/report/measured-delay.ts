/**
 * Delay as the data show it: the middle of the cross-correlation's peak between input and output, from their
 * averaged cross spectrum, which is aligned by the stated delay already. The middle and not the highest point:
 * white noise through an equal average has a peak with a flat top.
 * References: C. H. Knapp & G. C. Carter (1976), IEEE Transactions on Acoustics, Speech, and Signal Processing
 * 24, 320-327 (cross-correlation from the cross spectrum); R. N. Bracewell (1983), Journal of the Optical
 * Society of America 73, 1832-1835 (Hartley transform, by which a real transform runs backwards). Recalled
 * from memory.
 */
import type { CrossSpectra } from "../engine/cross-spectra.ts";
import { RealTransform } from "../signal/real-transform.ts";

export interface MeasuredDelay {
  /** Samples beyond the stated delay: 0 where the two agree. */
  readonly beyond_samples: number;
  /** Correlation coefficient at the peak, -1 to 1. */
  readonly correlation: number;
}

/** The peak reaches as far as the correlation stays above this share of its height. */
const SHOULDER = 0.5;

/** null without segments, or where the output is nothing. */
export function measuredDelay(cross: CrossSpectra): MeasuredDelay | null {
  if (cross.segments === 0) return null;
  const last = cross.xx.length - 1;
  const size = 2 * last;
  const total = (p: Float64Array) => p.reduce((sum, v, k) => sum + (k === 0 || k === last ? 1 : 2) * v, 0);
  const scale = Math.sqrt(total(cross.xx) * total(cross.yy));
  if (!(scale > 0) || size < 4) return null;
  const correlation = backwards(cross.xyRe, cross.xyIm, size);
  const at = (lag: number) => correlation[(lag + size) % size]! / scale;
  const farthest = Math.floor(size / 4);
  let best = 0;
  for (let lag = 1; lag <= farthest; lag++)
    for (const side of [lag, -lag]) if (at(side) > at(best) + 1e-12) best = side;
  const peak = at(best);
  if (!(peak > 0)) return { beyond_samples: 0, correlation: peak };
  const shoulder = SHOULDER * peak;
  let left = best;
  let right = best;
  while (left > best - farthest && at(left - 1) >= shoulder) left--;
  while (right < best + farthest && at(right + 1) >= shoulder) right++;
  // Where the curve passes the shoulder, between lags; a peak as wide as the segment has no sides to measure.
  const cut = (inside: number, outside: number) =>
    inside +
    (outside - inside) * Math.min(1, Math.max(0, (at(inside) - shoulder) / (at(inside) - at(outside) || 1)));
  const middle = (cut(left, left - 1) + cut(right, right + 1)) / 2;
  const wide = left <= best - farthest || right >= best + farthest;
  return { beyond_samples: wide ? best : middle, correlation: peak };
}

/** Real sequence of `size` samples whose half spectrum is re + i im, times its length. */
function backwards(re: Float64Array, im: Float64Array, size: number): Float64Array {
  const folded = new Float64Array(size);
  for (let k = 0; k < size; k++) folded[k] = 2 * k <= size ? re[k]! - im[k]! : re[size - k]! + im[size - k]!;
  const a = new Float64Array(size / 2 + 1);
  const b = new Float64Array(size / 2 + 1);
  new RealTransform(size).transform(folded, a, b);
  return Float64Array.from({ length: size }, (_, n) =>
    2 * n <= size ? a[n]! - b[n]! : a[size - n]! + b[size - n]!,
  );
}
