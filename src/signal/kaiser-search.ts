/**
 * The shortest windowed sinc with a Kaiser window that keeps a mask. Edges half-way between pass and stop; at each
 * length the best beta is sought, because Kaiser's formula for it is an estimate that asks for too much at some
 * lengths and too little at others.
 * References: J. F. Kaiser (1974), Proceedings of IEEE ISCAS, 20-23 (where the search starts); J. Kiefer (1953),
 * Proceedings of the AMS 4, 502-506 (golden-section search). Recalled from memory.
 */
import { DesignError } from "./design-error.ts";
import { DOUBT, edgeSides, worstExcess } from "./edge-excess.ts";
import { kaiserBeta, kaiserTaps } from "./kaiser.ts";
import { type Achieved, achievedBy, keeps, limitsOf, type Mask, transitionWidth } from "./mask.ts";
import { type Lengths, shortestLength } from "./shortest-length.ts";
import { designWindowedSinc } from "./windowed-sinc.ts";

export interface KaiserFilter {
  readonly taps: Float64Array;
  readonly beta: number;
  readonly achieved: Achieved;
}

/** Null when no length up to `most` keeps the mask. */
export function shortestKaiser(mask: Mask, lengths: Lengths, most: number): KaiserFilter | null {
  const { leak, lowest } = limitsOf(mask);
  const attenuation = -20 * Math.log10(Math.min(leak, 1 - lowest));
  const estimate = kaiserTaps(Math.max(21, attenuation), transitionWidth(mask));
  const attempt = (n: number) => {
    try {
      return bestOfLength(mask, n, kaiserBeta(attenuation));
    } catch (error) {
      // A few taps may be too few for the shape to pass anything.
      if (error instanceof DesignError) return null;
      throw error;
    }
  };
  return shortestLength(attempt, { estimate, lengths, most, failuresInRow: FAILURES_IN_ROW });
}

/** Lobes that move past an edge make one length fail and a shorter one succeed, over a few lengths. */
const FAILURES_IN_ROW = 4;

/** How far around Kaiser's beta the best one is sought. */
const BETA_BELOW = 2.5;
const BETA_ABOVE = 2;
const GOLDEN = (Math.sqrt(5) - 1) / 2;
const BETA_PRECISION = 0.003;

/** The design of one length, if some beta keeps the mask. */
function bestOfLength(mask: Mask, n: number, nearBeta: number): KaiserFilter | null {
  const edges = mask.pass.map((p, i) => (p + mask.stop[i]!) / 2);
  const sides = edgeSides(mask, n);
  const design = (beta: number) =>
    designWindowedSinc({ taps: n, shape: mask.shape, edges, window: "kaiser", beta });
  /** How many times too large the worst deviation near the edges is. */
  const excess = (beta: number): number => worstExcess(sides, design(beta));
  const verified = (beta: number): KaiserFilter | null => {
    const taps = design(beta);
    const achieved = achievedBy(taps, mask);
    return keeps(achieved, mask) ? { taps, beta, achieved } : null;
  };
  let low = Math.max(0, nearBeta - BETA_BELOW);
  let high = nearBeta + BETA_ABOVE;
  let c = high - GOLDEN * (high - low);
  let d = low + GOLDEN * (high - low);
  let atC = excess(c);
  let atD = excess(d);
  // The whole response is looked at twice at most: at the first beta that clearly keeps the mask, and at the best.
  let looked = false;
  while (high - low > BETA_PRECISION) {
    if (!looked && Math.min(atC, atD) < 1 - DOUBT) {
      looked = true;
      const kept = verified(atC < atD ? c : d);
      if (kept !== null) return kept;
    }
    if (atC < atD) {
      [high, d, atD] = [d, c, atC];
      c = high - GOLDEN * (high - low);
      atC = excess(c);
    } else {
      [low, c, atC] = [c, d, atD];
      d = low + GOLDEN * (high - low);
      atD = excess(d);
    }
  }
  if (Math.min(atC, atD) < 1 + DOUBT) return verified(atC < atD ? c : d);
  return low === 0 && excess(0) < 1 + DOUBT ? verified(0) : null;
}
