/**
 * The shortest equiripple filter that keeps a mask. The error is weighted so that a deviation of 1 fills the mask, and
 * the passband's wish is the middle of its limits; the smallest possible deviation falls with every two taps more, so
 * the search is exact for odd and for even lengths: no linear-phase filter of that parity, of whatever design, is
 * shorter.
 * References: O. Herrmann, L. R. Rabiner & D. S. K. Chan (1973), Bell System Technical Journal 52, 769-799; J. F. Kaiser
 * (1974), Proceedings of IEEE ISCAS, 20-23 (taps = (-20 log10 sqrt(d1 d2) - 13) / (14.6 df) + 1, where the search starts).
 * Recalled from memory.
 */
import type { DesignBand } from "./design-bands.ts";
import { DesignError } from "./design-error.ts";
import { measuredEquiripple } from "./equiripple.ts";
import { type Achieved, achievedBy, bandsOf, keeps, limitsOf, type Mask, transitionWidth } from "./mask.ts";
import { type Lengths, shortestLength } from "./shortest-length.ts";

export interface MaskFilter {
  readonly taps: Float64Array;
  readonly achieved: Achieved;
  /** Largest gain in the transitions and anywhere else that the mask leaves free. */
  readonly largestDontCareGain: number;
}

/** The estimate is good to some per cent; when it says so many times the most, no design is tried. */
export const HOPELESS = 1.3;

/** Null when no length up to `most` keeps the mask. */
export function shortestEquiripple(mask: Mask, lengths: Lengths, most: number): MaskFilter | null {
  if (equirippleEstimate(mask) > HOPELESS * most) return null;
  const bands = weightedBands(mask);
  const attempt = (n: number): MaskFilter | null => {
    try {
      const made = measuredEquiripple(n, bands);
      if (made === null) return null;
      const achieved = achievedBy(made.taps, mask);
      return keeps(achieved, mask)
        ? { taps: made.taps, achieved, largestDontCareGain: made.largestDontCareGain }
        : null;
    } catch (error) {
      if (error instanceof DesignError) return null;
      throw error;
    }
  };
  const search = (parity: "odd" | "even") =>
    shortestLength(attempt, { estimate: equirippleEstimate(mask), lengths: parity, most, failuresInRow: 1 });
  const odd = lengths === "even" ? null : search("odd");
  const even = lengths === "odd" ? null : search("even");
  if (odd === null || even === null) return odd ?? even;
  return even.taps.length < odd.taps.length ? even : odd;
}

/** Taps by the published estimate. */
export function equirippleEstimate(mask: Mask): number {
  const { lowest, highest, leak } = limitsOf(mask);
  const size = Math.sqrt(((highest - lowest) / 2) * leak);
  return Math.max(3, (-20 * Math.log10(size) - 13) / (14.6 * transitionWidth(mask)) + 1);
}

/** The mask as bands of a criterion: weight 1 over what is allowed. */
export function weightedBands(mask: Mask): DesignBand[] {
  const { lowest, highest, leak } = limitsOf(mask);
  const { pass, stop } = bandsOf(mask);
  return [
    ...pass.map(([from, to]) => ({
      from,
      to,
      gain: (highest + lowest) / 2,
      weight: 2 / (highest - lowest),
    })),
    ...stop.map(([from, to]) => ({ from, to, gain: 0, weight: 1 / leak })),
  ].sort((a, b) => a.from - b.from);
}
