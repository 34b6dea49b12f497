/**
 * Response of interpolation between even rows: a point at the place u between two rows is a weighted sum of
 * rows, so its gain at f is |sum over j of w[j](u) e^(2 pi i f (j - u))|, and over the places that occurred the
 * mean of its square is what happens to the power. Exact for methods that are linear in the values and for
 * even rows (interpolation as filtering: R. W. Schafer & L. R. Rabiner (1973), Proceedings of the IEEE 61,
 * 692-702; recalled from memory).
 */
import type { SincKernel } from "./band-limited.ts";

/** Weights by offset from the row before the point: [offset, weight]. */
export type PlaceWeights = (u: number) => readonly (readonly [number, number])[];

export const straightLineWeights: PlaceWeights = (u) => [
  [0, 1 - u],
  [1, u],
];

/** Catmull & Rom's cubic: slopes by central differences. */
export const localCubicWeights: PlaceWeights = (u) => {
  const u2 = u * u;
  const u3 = u2 * u;
  return [
    [-1, (-u3 + 2 * u2 - u) / 2],
    [0, (3 * u3 - 5 * u2 + 2) / 2],
    [1, (-3 * u3 + 4 * u2 + u) / 2],
    [2, (u3 - u2) / 2],
  ];
};

export const sincWeights =
  (kernel: SincKernel): PlaceWeights =>
  (u) => {
    const list: [number, number][] = [];
    let total = 0;
    for (let j = 1 - kernel.half; j <= kernel.half; j++) {
      const w = kernel.weight(u - j);
      total += w;
      list.push([j, w]);
    }
    return list.map(([j, w]) => [j, w / total]);
  };

/** Mean |H|^2 at f cycles/row over the places; `exact` points count with gain 1. */
export function meanPowerGainOver(
  weights: PlaceWeights,
  places: readonly number[],
  exact: number,
  f: number,
): number {
  let sum = exact;
  let count = exact;
  places.forEach((n, p) => {
    if (n === 0) return;
    const u = (p + 0.5) / places.length;
    let re = 0;
    let im = 0;
    for (const [j, w] of weights(u)) {
      const angle = 2 * Math.PI * f * (j - u);
      re += w * Math.cos(angle);
      im += w * Math.sin(angle);
    }
    sum += n * (re * re + im * im);
    count += n;
  });
  return count === 0 ? 1 : sum / count;
}
