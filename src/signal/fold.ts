/**
 * Where a frequency appears after sampling.
 * References: the sampling theorem, C. E. Shannon (1949), Proceedings of the IRE 37, 10-21.
 */

export interface Folded {
  /** |f - rate * nearest integer(f / rate)|, between 0 and rate / 2. */
  readonly frequency: number;
  /** True where the spectrum comes out turned round: rising frequencies appear to fall. */
  readonly inverted: boolean;
}

/** @param f, samplingRate  in the same unit, f >= 0, samplingRate > 0 */
export function foldedFrequency(f: number, samplingRate: number): Folded {
  // The remainder is exact in floating point, so that f = k * rate gives exactly 0.
  const rest = f % samplingRate;
  return rest > samplingRate / 2 ? { frequency: samplingRate - rest, inverted: true } : { frequency: rest, inverted: false };
}
