/**
 * Gauss-Legendre quadrature of any order.
 * References: M. Abramowitz & I. A. Stegun (1964), Handbook of Mathematical Functions, 25.4.29; the recurrence 8.5.3.
 * Newton's method from Tricomi's estimate of the zeros (F. G. Tricomi, 1950). Recalled from memory.
 */

export interface Quadrature {
  /** On -1 … 1, rising. */
  readonly points: Float64Array;
  /** They add up to 2. */
  readonly weights: Float64Array;
}

/** @param order  number of points, >= 1; exact for polynomials of degree 2 order - 1 */
export function gaussLegendre(order: number): Quadrature {
  const points = new Float64Array(order);
  const weights = new Float64Array(order);
  for (let i = 0; 2 * i < order; i++) {
    let x = Math.cos((Math.PI * (i + 0.75)) / (order + 0.5));
    let slope = 1;
    for (let round = 0; round < 20; round++) {
      let [p, before] = [1, 0];
      for (let k = 1; k <= order; k++) [p, before] = [((2 * k - 1) * x * p - (k - 1) * before) / k, p];
      slope = (order * (before - x * p)) / (1 - x * x);
      const move = p / slope;
      x -= move;
      if (Math.abs(move) < 1e-15) break;
    }
    if (2 * i + 1 === order) x = 0;
    points[order - 1 - i] = x;
    points[i] = -x;
    weights[i] = 2 / ((1 - x * x) * slope * slope);
    weights[order - 1 - i] = weights[i]!;
  }
  return { points, weights };
}
