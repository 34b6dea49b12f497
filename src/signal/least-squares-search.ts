/**
 * The shortest least-squares filter that keeps a mask. At each length the weight of the stopband against the passband
 * is sought at which both use the same share of what they are allowed; its integrals are computed once a length.
 * References: those of least-squares.ts for the design; the search for the balance has no published source.
 */
import { largestDontCareGain } from "./design-bands.ts";
import { DOUBT, edgeSides, worstExcess } from "./edge-excess.ts";
import { equirippleEstimate, HOPELESS, type MaskFilter, weightedBands } from "./equiripple-search.ts";
import { bandIntegrals, solveNormalEquations } from "./least-squares.ts";
import { achievedBy, keeps, limitsOf, type Mask } from "./mask.ts";
import { type Lengths, shortestLength } from "./shortest-length.ts";

/** Least squares needs some more than the estimate for equiripple. */
const LONGER = 1.15;
const FAILURES_IN_ROW = 4;
const MOST_TRIES = 24;
/** Decades of weight in which the balance is sought, on either side of the squared ratio of the limits. */
const DECADES = 4;

/** Null when no length up to `most` keeps the mask. */
export function shortestLeastSquares(mask: Mask, lengths: Lengths, most: number): MaskFilter | null {
  const estimate = LONGER * equirippleEstimate(mask);
  if (estimate > HOPELESS * most) return null;
  return shortestLength((n) => bestOfLength(mask, n), {
    estimate,
    lengths,
    most,
    failuresInRow: FAILURES_IN_ROW,
  });
}

/** The design of one length, if some weight keeps the mask. */
function bestOfLength(mask: Mask, n: number): MaskFilter | null {
  const bands = weightedBands(mask);
  const parts = bands.map((band) => bandIntegrals(n, band));
  const sides = edgeSides(mask, n);
  const [pass, stop] = (["pass", "stop"] as const).map((kind) => sides.filter((s) => s.kind === kind));
  const { lowest, highest, leak } = limitsOf(mask);
  const design = (decades: number) =>
    solveNormalEquations(
      n,
      parts,
      bands.map((b) => (b.gain === 0 ? 10 ** decades : 1)),
    ).taps;
  const verified = (taps: Float64Array): MaskFilter | null => {
    const achieved = achievedBy(taps, mask);
    if (!keeps(achieved, mask)) return null;
    return { taps, achieved, largestDontCareGain: largestDontCareGain(taps, bands).gain };
  };
  const centre = 2 * Math.log10((highest - lowest) / 2 / leak);
  let low = centre - DECADES;
  let high = centre + DECADES;
  let looked = false;
  let taps = design(centre);
  for (let i = 0; i < MOST_TRIES; i++) {
    const decades = (low + high) / 2;
    taps = design(decades);
    const inPass = worstExcess(pass!, taps);
    const inStop = worstExcess(stop!, taps);
    // More weight on the stopband lowers its error and raises the passband's: the best is where they are alike.
    if (!looked && Math.max(inPass, inStop) < 1 - DOUBT) {
      looked = true;
      const kept = verified(taps);
      if (kept !== null) return kept;
    }
    if (Math.min(inPass, inStop) > 1 + DOUBT) return null;
    if (inStop > inPass) low = decades;
    else high = decades;
    if (high - low < 1e-3) break;
  }
  return verified(taps);
}
