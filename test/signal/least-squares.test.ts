import { describe, expect, it } from "vitest";
import type { DesignBand } from "../../src/signal/design-bands.ts";
import { DesignError } from "../../src/signal/design-error.ts";
import { designLeastSquares, squaredError } from "../../src/signal/least-squares.ts";
import reference from "../reference/06-least-squares-taps.json" with { type: "json" };
import { uniform } from "./masks.ts";

describe("least squares against reference 06", () => {
  it.each(reference.cases)("$id", ({ inputs, expected }) => {
    const e = inputs.bandsCyclesPerSample;
    const g = inputs.desiredAtEdges;
    const bands = inputs.weights.map((weight, i) => ({
      from: e[2 * i]!,
      to: e[2 * i + 1]!,
      gain: [g[2 * i]!, g[2 * i + 1]!] as const,
      weight,
    }));
    const made = designLeastSquares(inputs.taps, bands);
    for (const [n, wanted] of expected.taps.entries())
      expect(Math.abs(made.taps[n]! - wanted)).toBeLessThan(reference.tolerance.tapsAbs);
    expect(Math.abs(made.squaredError / expected.weightedIntegralSquaredError - 1)).toBeLessThan(
      reference.tolerance.iseRel,
    );
  });
});

describe("least squares", () => {
  const bandsFrom = (next: () => number): DesignBand[] => {
    const a = 0.05 + 0.1 * next();
    const b = a + 0.02 + 0.08 * next();
    const c = b + 0.05 + 0.1 * next();
    const d = c + 0.02 + 0.05 * next();
    const weight = () => 10 ** (2 * next() - 1);
    return [
      { from: 0, to: a, gain: 0, weight: weight() },
      { from: b, to: c, gain: [1, 0.5 + next()], weight: weight() },
      { from: d, to: next() < 0.5 ? 0.5 : 0.49, gain: 0, weight: weight() },
    ];
  };

  it("no change of any pair of taps lowers the integral, odd and even lengths", () => {
    const next = uniform(4711);
    for (const n of [1, 2, 3, 4, 9, 24, 41, 64, 101]) {
      const bands = bandsFrom(next);
      const { taps, squaredError: least } = designLeastSquares(n, bands);
      expect(Array.from(taps)).toEqual(Array.from(taps).reverse());
      for (let i = 0; 2 * i < n; i++)
        for (const change of [1e-4, -1e-4]) {
          const other = taps.slice();
          other[i]! += change;
          if (i !== n - 1 - i) other[n - 1 - i]! += change;
          const worse = squaredError(other, bands);
          expect(worse).toBeGreaterThan(least);
          // The integral is a parabola about its minimum: both sides rise alike.
          other[i] = taps[i]! - change;
          other[n - 1 - i] = other[i]!;
          expect(Math.abs(squaredError(other, bands) - worse)).toBeLessThan(1e-6 * (worse - least) + 1e-16);
        }
    }
  });

  it("weights matter as they should", () => {
    const design = (weight: number) =>
      designLeastSquares(31, [
        { from: 0, to: 0.1, gain: 1, weight: 1 },
        { from: 0.15, to: 0.5, gain: 0, weight },
      ]).taps;
    const pass: DesignBand[] = [{ from: 0, to: 0.1, gain: 1, weight: 1 }];
    const stop: DesignBand[] = [{ from: 0.15, to: 0.5, gain: 0, weight: 1 }];
    // The optimum's error in a band falls as its weight grows, and that of the others rises.
    const designs = [0.1, 1, 10, 100].map(design);
    for (let i = 1; i < designs.length; i++) {
      expect(squaredError(designs[i]!, stop)).toBeLessThan(squaredError(designs[i - 1]!, stop));
      expect(squaredError(designs[i]!, pass)).toBeGreaterThan(squaredError(designs[i - 1]!, pass));
    }
  });

  it("stays sober when the equations are all but singular", () => {
    // A gap of 0.3 cycles/sample and 401 taps: most directions are seen by no band.
    const bands: DesignBand[] = [
      { from: 0, to: 0.1, gain: 1, weight: 1 },
      { from: 0.4, to: 0.5, gain: 0, weight: 1 },
    ];
    const made = designLeastSquares(401, bands);
    expect(made.squaredError).toBeLessThan(1e-14);
    expect(made.largestDontCareGain).toBeLessThan(1.1);
  });

  it("two taps more never make it worse, where the normal equations would have lost all digits too", () => {
    const bands: DesignBand[] = [
      { from: 0, to: 0.12, gain: [0.3, 1], weight: 1 },
      { from: 0.18, to: 0.45, gain: 0, weight: 2 },
    ];
    let least = Number.POSITIVE_INFINITY;
    for (let n = 3; n < 150; n += 2) {
      const made = designLeastSquares(n, bands);
      expect(made.squaredError, `${n} taps`).toBeLessThanOrEqual(least * (1 + 1e-9));
      least = made.squaredError;
    }
  });

  it("refuses impossible bands", () => {
    expect(() => designLeastSquares(20, [{ from: 0.2, to: 0.5, gain: 1, weight: 1 }])).toThrow(DesignError);
    expect(() => designLeastSquares(20, [])).toThrow(DesignError);
    expect(() => designLeastSquares(5001, [{ from: 0, to: 0.1, gain: 1, weight: 1 }])).toThrow(DesignError);
  });
});
