/**
 * Where a frequency appears after sampling, and which frequencies appear in a band.
 * References: the sampling theorem, C. E. Shannon (1949), Proceedings of the IRE 37, 10-21: a tone at f and
 * one at |f - k fs| have the same samples. Recalled from memory.
 */

export interface Folded {
  /** |f - rate * nearest integer to f / rate|, between 0 and rate / 2. */
  readonly frequency: number;
  /** True where the spectrum comes out turned round: rising frequencies appear to fall. */
  readonly inverted: boolean;
}

export interface Band {
  readonly from: number;
  readonly to: number;
}

/**
 * Apparent frequency of a tone. Exact: the remainder is exact in floating point, and so is the difference of
 * two numbers within a factor of two of each other. f = k fs gives 0, f = (k + 1/2) fs gives fs / 2.
 * @param f             frequency of the tone, >= 0
 * @param samplingRate  in the same unit, > 0
 * @throws RangeError outside these ranges
 */
export function foldedFrequency(f: number, samplingRate: number): Folded {
  if (!(f >= 0 && f < Number.POSITIVE_INFINITY)) throw new RangeError(`frequency ${f} is not >= 0`);
  if (!(samplingRate > 0)) throw new RangeError(`sampling rate ${samplingRate} is not > 0`);
  const rest = f % samplingRate;
  return rest > samplingRate / 2
    ? { frequency: samplingRate - rest, inverted: true }
    : { frequency: rest, inverted: false };
}

/**
 * All frequencies in (newRate / 2, oldRate / 2] that land in a band once only every M-th sample is kept,
 * M = oldRate / newRate: k newRate - band and k newRate + band, k = 1, 2, …, rising, with intervals that
 * touch joined into one. A frequency of exactly newRate / 2 stays where it is and is no source; an interval
 * that begins there is open at that end.
 * @param band  0 <= from <= to <= newRate / 2, in the unit of the rates; from = to asks for one frequency
 * @throws RangeError when the band is not such, or M is not a whole number >= 1 within 1e-9
 */
export function foldSources(band: Band, newRate: number, oldRate: number): Band[] {
  const factor = Math.round(oldRate / newRate);
  if (!(factor >= 1 && Math.abs(oldRate / newRate / factor - 1) < 1e-9))
    throw new RangeError(`rate ${oldRate} is not a whole multiple of ${newRate}`);
  const half = newRate / 2;
  if (!(band.from >= 0 && band.from <= band.to && band.to <= half * (1 + 1e-9)))
    throw new RangeError(`band ${band.from} to ${band.to} does not lie in 0 to ${half}`);
  const low = Math.min(band.from, half);
  const high = Math.min(band.to, half);
  const top = oldRate / 2;
  const sources: { from: number; to: number }[] = [];
  const include = (from: number, to: number) => {
    const end = Math.min(to, top);
    if (end <= half || from > end) return;
    const last = sources.at(-1);
    if (last !== undefined && from <= last.to) last.to = end;
    else sources.push({ from: Math.max(from, half), to: end });
  };
  for (let k = 1; 2 * k <= factor; k++) {
    // The same product for both sides of k, and for neighbours that meet half-way: touching ends are equal.
    const centre = 2 * k === factor ? top : k * newRate;
    include(high === half ? (k - 0.5) * newRate : centre - high, centre - low);
    include(centre + low, high === half ? (k + 0.5) * newRate : centre + high);
  }
  // An odd factor ends half-way between two multiples: nothing of the next multiple's lower side is inside,
  // but for the frequency oldRate / 2 itself, which lands at newRate / 2.
  if (factor % 2 === 1 && factor > 1 && high === half) include(top, top);
  return sources;
}
