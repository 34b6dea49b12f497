import { describe, expect, it } from "vitest";
import { conditionOf, factorize, solve } from "../../src/signal/cholesky.ts";
import { gaussLegendre } from "../../src/signal/gauss-legendre.ts";
import { leastSquares } from "../../src/signal/householder.ts";
import { uniform } from "./masks.ts";

describe("Gauss-Legendre quadrature", () => {
  it("is exact for every power up to 2 n - 1, and for cosines with few points a turn", () => {
    for (const n of [1, 2, 5, 16, 64, 301]) {
      const { points, weights } = gaussLegendre(n);
      for (let k = 0; k < Math.min(2 * n, 80); k++) {
        const sum = points.reduce((s, x, i) => s + weights[i]! * x ** k, 0);
        expect(Math.abs(sum - (k % 2 === 0 ? 2 / (k + 1) : 0))).toBeLessThan(1e-13);
      }
    }
    const { points, weights } = gaussLegendre(350);
    const sum = points.reduce((s, x, i) => s + weights[i]! * Math.cos(300 * x), 0);
    expect(Math.abs(sum - (2 * Math.sin(300)) / 300)).toBeLessThan(1e-13);
  });

  it("knows the printed four points (Abramowitz & Stegun, table 25.4)", () => {
    const { points, weights } = gaussLegendre(4);
    expect(points[3]).toBeCloseTo(0.861136311594053, 14);
    expect(points[2]).toBeCloseTo(0.339981043584856, 14);
    expect(weights[3]).toBeCloseTo(0.347854845137454, 14);
    expect(weights[1]).toBeCloseTo(0.652145154862546, 14);
  });
});

describe("linear equations", () => {
  const columns = (rows: number, n: number, next: () => number) =>
    Array.from({ length: n }, () => new Float64Array(rows).map(() => next() - 0.5));

  it("reflections and normal equations find the same least squares", () => {
    const next = uniform(17);
    for (const [rows, n] of [
      [1, 1],
      [5, 5],
      [40, 7],
      [200, 60],
    ] as const) {
      const a = columns(rows, n, next);
      const b = new Float64Array(rows).map(() => next());
      const matrix = new Float64Array(n * n);
      const right = new Float64Array(n);
      for (let i = 0; i < n; i++) {
        right[i] = a[i]!.reduce((s, x, r) => s + x * b[r]!, 0);
        for (let j = 0; j < n; j++) matrix[i * n + j] = a[i]!.reduce((s, x, r) => s + x * a[j]![r]!, 0);
      }
      const normal = solve(factorize(matrix, n), right);
      const x = leastSquares(
        a.map((c) => c.slice()),
        b.slice(),
      )!;
      for (let i = 0; i < n; i++) expect(Math.abs(x[i]! - normal[i]!)).toBeLessThan(1e-8);
    }
  });

  it("says that columns depend on each other instead of dividing by rounding", () => {
    const next = uniform(2);
    const [a, b] = columns(9, 2, next) as [Float64Array, Float64Array];
    const sum = a.map((x, i) => x + b[i]!);
    expect(leastSquares([a.slice(), b.slice(), sum], new Float64Array(9).fill(1))).toBeNull();
    expect(leastSquares([new Float64Array(9)], new Float64Array(9).fill(1))).toBeNull();
  });

  it("estimates the condition, hides no near-singularity, and refuses what is not positive", () => {
    const hilbert = (n: number) =>
      new Float64Array(n * n).map((_, i) => 1 / (Math.floor(i / n) + (i % n) + 1));
    // Condition numbers of Hilbert matrices (2-norm) of order 3, 5 and 8: 524.06, 4.766e5, 1.526e10.
    for (const [n, condition] of [
      [3, 524.06],
      [5, 4.766e5],
      [8, 1.526e10],
    ] as const) {
      const estimate = conditionOf(factorize(hilbert(n), n));
      expect(estimate).toBeGreaterThan(0.9 * condition);
      expect(estimate).toBeLessThan(3 * condition);
    }
    const singular = factorize(hilbert(20), 20);
    expect(singular.added).toBeGreaterThan(0);
    expect(conditionOf(singular)).toBe(Number.POSITIVE_INFINITY);
    expect(solve(singular, new Float64Array(20).fill(1)).every(Number.isFinite)).toBe(true);
    expect(() => factorize(Float64Array.of(-1), 1)).toThrow(RangeError);
    expect(() => factorize(Float64Array.of(1, 2, 2, 1), 2)).toThrow(RangeError);
    expect(() => factorize(Float64Array.of(Number.NaN), 1)).toThrow(RangeError);
  });
});
