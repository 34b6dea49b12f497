/**
 * How far a filter breaks a mask next to its transitions, in multiples of what is allowed: a cheap first look during
 * a search, since windowed and least-squares designs deviate most there. The whole response has the last word.
 */
import { amplitudeAt } from "./linear-phase.ts";
import { bandsOf, limitsOf, type Mask } from "./mask.ts";

/** Doubt of an excess, from the parabolas through its points. */
export const DOUBT = 0.001;

/** Evenly spaced frequencies from an edge into its band, over the first lobes: the worst deviation lies there. */
export interface EdgeSide {
  readonly frequencies: readonly number[];
  /** Deviation of an amplitude in this band, as a multiple of what is allowed. */
  readonly kind: "pass" | "stop";
  readonly excessOf: (amplitude: number) => number;
}

const POINTS_PER_LOBE = 16;
const LOBES = 3;

/** All sides of all transitions of a mask, for filters of n taps. */
export function edgeSides(mask: Mask, n: number): EdgeSide[] {
  const { lowest, highest, leak } = limitsOf(mask);
  const passes = (a: number) => Math.max((a - 1) / (highest - 1), (1 - a) / (1 - lowest));
  const stops = (a: number) => Math.abs(a) / leak;
  const { pass, stop } = bandsOf(mask);
  const sides: EdgeSide[] = [];
  for (const [kind, bands, edges, excessOf] of [
    ["pass", pass, mask.pass, passes],
    ["stop", stop, mask.stop, stops],
  ] as const)
    for (const [from, to] of bands)
      for (const edge of [from, to]) {
        if (!edges.includes(edge)) continue;
        const inward = edge === from ? 1 : -1;
        const all = Array.from(
          { length: LOBES * POINTS_PER_LOBE + 1 },
          (_, i) => edge + (inward * i) / (POINTS_PER_LOBE * n),
        );
        sides.push({ kind, frequencies: all.filter((f) => f >= from && f <= to), excessOf });
      }
  return sides;
}

/** Largest excess over the sides. */
export function worstExcess(sides: readonly EdgeSide[], taps: Float64Array): number {
  return sides.reduce((worst, side) => Math.max(worst, worstOf(side, taps)), 0);
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
