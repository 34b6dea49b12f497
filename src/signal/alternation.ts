/**
 * Extremes of alternating sign of an error over bands, as Chebyshev's theorem counts them.
 * References: E. W. Cheney (1966), Introduction to Approximation Theory, chapter 3 (alternation theorem; the lower
 * bound of de la Vallee-Poussin: an error that alternates at r + 1 points proves that no approximation with r
 * coefficients has a smaller largest error than the smallest of these). Recalled from memory.
 */
import { climb } from "./gain-curve.ts";

export interface Extreme {
  readonly frequency: number;
  /** Signed. */
  readonly error: number;
}

/** Of the place of an extreme, as a share of the distance between the points around it. */
const PRECISION = 1e-7;
/** A point found is taken before the one known only when it is higher by more than this: band edges stay exact. */
const ROUNDING = 1e-12;

/**
 * The largest error of each stretch of one sign, in rising order; signs alternate.
 * @param points  frequencies of each band, rising, both ends included, dense enough to show every stretch
 */
export function alternatingExtremes(
  error: (f: number, band: number) => number,
  points: readonly Float64Array[],
): Extreme[] {
  const found: Extreme[] = [];
  let sign = 0;
  let best = { band: 0, index: 0, size: 0 };
  const close = () => {
    if (sign === 0) return;
    const f = points[best.band]!;
    const i = best.index;
    const value = (x: number) => sign * error(x, best.band);
    const from = f[Math.max(0, i - 1)]!;
    const to = f[Math.min(f.length - 1, i + 1)]!;
    // At the end of a band the extreme is the end itself or lies next to it.
    const middle = i === 0 || i === f.length - 1 ? (from + to) / 2 : f[i]!;
    const top = climb(value, from, middle, to, PRECISION);
    found.push(
      top.value > best.size * (1 + ROUNDING)
        ? { frequency: top.at, error: sign * top.value }
        : { frequency: f[i]!, error: sign * best.size },
    );
  };
  for (const [band, f] of points.entries())
    for (let index = 0; index < f.length; index++) {
      const e = error(f[index]!, band);
      const now = Math.sign(e);
      if (now !== 0 && now !== sign) {
        close();
        sign = now;
        best = { band, index, size: Math.abs(e) };
      } else if (now !== 0 && Math.abs(e) > best.size) best = { band, index, size: Math.abs(e) };
    }
  close();
  return found;
}

/**
 * As many alternating extremes as wanted, the smallest left out first; the largest always stays.
 * An inner one goes together with its smaller neighbour, since the signs must go on alternating.
 */
export function strongest(extremes: readonly Extreme[], wanted: number): Extreme[] {
  const left = [...extremes];
  const size = (i: number) => Math.abs(left[i]!.error);
  while (left.length > wanted) {
    const last = left.length - 1;
    if (left.length - wanted === 1) {
      left.splice(size(0) < size(last) ? 0 : last, 1);
      continue;
    }
    let least = 0;
    for (let i = 1; i <= last; i++) if (size(i) < size(least)) least = i;
    if (least === 0 || least === last) left.splice(least, 1);
    else left.splice(size(least - 1) < size(least + 1) ? least - 1 : least, 2);
  }
  return left;
}

/** Evenly spaced in the angle of a Chebyshev node between a and b: crowded at both ends, as extremes are. */
export function crowdedPoints(a: number, b: number, intervals: number): number[] {
  return Array.from({ length: intervals + 1 }, (_, i) => {
    if (i === 0) return a;
    if (i === intervals) return b;
    return a + (b - a) * Math.sin((Math.PI * i) / (2 * intervals)) ** 2;
  });
}
