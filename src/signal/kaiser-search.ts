/**
 * The shortest windowed sinc with a Kaiser window that keeps a mask. Edges half-way between pass and stop; at each
 * length the best beta is sought, because Kaiser's formula for it is an estimate that asks for too much at some
 * lengths and too little at others.
 * References: J. F. Kaiser (1974), Proceedings of IEEE ISCAS, 20-23 (where the search starts); J. Kiefer (1953),
 * Proceedings of the AMS 4, 502-506 (golden-section search). Recalled from memory.
 */
import { DesignError } from "./design-error.ts";
import { kaiserBeta, kaiserTaps } from "./kaiser.ts";
import { amplitudeAt } from "./linear-phase.ts";
import { type Achieved, achievedBy, bandsOf, keeps, limitsOf, type Mask, transitionWidth } from "./mask.ts";
import { shortestLength } from "./shortest-length.ts";
import { designWindowedSinc } from "./windowed-sinc.ts";

export interface KaiserFilter {
  readonly taps: Float64Array;
  readonly beta: number;
  readonly achieved: Achieved;
}

/** Null when no length up to `most` keeps the mask. */
export function shortestKaiser(mask: Mask, step: 1 | 2, most: number): KaiserFilter | null {
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
  return shortestLength(attempt, { estimate, step, most });
}

/** How far around Kaiser's beta the best one is sought. */
const BETA_BELOW = 2.5;
const BETA_ABOVE = 2;
const GOLDEN = (Math.sqrt(5) - 1) / 2;
const BETA_PRECISION = 0.003;
/** Doubt of the excess near the edges, from the parabolas through its points. */
const DOUBT = 0.001;

/** The design of one length, if some beta keeps the mask. */
function bestOfLength(mask: Mask, n: number, nearBeta: number): KaiserFilter | null {
  const edges = mask.pass.map((p, i) => (p + mask.stop[i]!) / 2);
  const sides = edgeSides(mask, n);
  const design = (beta: number) =>
    designWindowedSinc({ taps: n, shape: mask.shape, edges, window: "kaiser", beta });
  /** How many times too large the worst deviation near the edges is. */
  const excess = (beta: number): number => {
    const taps = design(beta);
    return Math.max(...sides.map((side) => worstOf(side, taps)));
  };
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

/** Evenly spaced frequencies from an edge into its band, over the first lobes: the worst deviation lies there. */
interface EdgeSide {
  readonly frequencies: readonly number[];
  /** Deviation of an amplitude in this band, as a multiple of what is allowed. */
  readonly excessOf: (amplitude: number) => number;
}

const POINTS_PER_LOBE = 16;
const LOBES = 3;

function edgeSides(mask: Mask, n: number): EdgeSide[] {
  const { lowest, highest, leak } = limitsOf(mask);
  const passes = (a: number) => Math.max((a - 1) / (highest - 1), (1 - a) / (1 - lowest));
  const stops = (a: number) => Math.abs(a) / leak;
  const { pass, stop } = bandsOf(mask);
  const sides: EdgeSide[] = [];
  for (const [bands, edges, excessOf] of [
    [pass, mask.pass, passes],
    [stop, mask.stop, stops],
  ] as const)
    for (const [from, to] of bands)
      for (const edge of [from, to]) {
        if (!edges.includes(edge)) continue;
        const inward = edge === from ? 1 : -1;
        const all = Array.from(
          { length: LOBES * POINTS_PER_LOBE + 1 },
          (_, i) => edge + (inward * i) / (POINTS_PER_LOBE * n),
        );
        sides.push({ frequencies: all.filter((f) => f >= from && f <= to), excessOf });
      }
  return sides;
}

/** Largest excess on one side, between its points too: each inner maximum by the parabola through three of them. */
function worstOf({ frequencies, excessOf }: EdgeSide, taps: Float64Array): number {
  const e = frequencies.map((f) => excessOf(amplitudeAt(taps, f)));
  let worst = 0;
  for (let i = 0; i < e.length; i++) {
    worst = Math.max(worst, e[i]!);
    const [a, b, c] = [e[i - 1] ?? Number.NaN, e[i]!, e[i + 1] ?? Number.NaN];
    if (b > a && b >= c) worst = Math.max(worst, b + (a - c) ** 2 / (8 * (2 * b - a - c)));
  }
  return worst;
}
