import { describe, expect, it } from "vitest";
import { gainAt } from "../../src/signal/response.ts";
import { hendersonWeights, WEIGHTED_AVERAGES, weightedAverage } from "../../src/signal/weighted-averages.ts";
import reference from "../reference/08-published-weighted-averages.json" with { type: "json" };

const NAMES: Record<string, string> = {
  spencer15: "spencer-15",
  henderson5: "henderson-5",
  henderson13: "henderson-13",
  triangle5: "3x3",
  "2x12": "2x12",
};

describe("published weighted averages against reference 08", () => {
  it.each(reference.cases)("$id", ({ id, inputs, expected }) => {
    const w = weightedAverage(NAMES[id]!)!;
    expect(w.length).toBe(expected.weightsFloat.length);
    for (const [i, text] of expected.weights.entries()) {
      const [above, below] = text.split("/").map(Number);
      expect(Math.abs(w[i]! - above! / (below ?? 1))).toBeLessThan(1e-16);
    }
    const m = (w.length - 1) / 2;
    for (const [k, moment] of expected.moments0to4.entries())
      expect(w.reduce((sum, x, i) => sum + x * (i - m) ** k, 0)).toBeCloseTo(moment, 10);
    for (const [i, f] of expected.amplitudeAt.cyclesPerSample.entries())
      expect(Math.abs(gainAt(w, f) - Math.abs(expected.amplitudeAt.value[i]!))).toBeLessThan(1e-12);
    const scale = Math.max(...inputs.x.map(Math.abs));
    const { firstIndex, y } = expected.outputFullWindowOnly;
    for (const [i, wanted] of y.entries()) {
      const value = w.reduce((sum, x, j) => sum + x * inputs.x[firstIndex + i - m + j]!, 0);
      expect(Math.abs(value - wanted)).toBeLessThan(1e-13 * scale);
    }
  });
});

describe("weighted averages by name", () => {
  it("Spencer's 21 points: the printed weights, cubics kept, periods of 5 and 7 removed", () => {
    const w = weightedAverage("spencer-21")!;
    const printed = [-1, -3, -5, -5, -2, 6, 18, 33, 47, 57, 60];
    expect(Array.from(w.slice(0, 11))).toEqual(printed.map((x) => x / 350));
    for (let k = 0; k <= 3; k++)
      expect(w.reduce((sum, x, i) => sum + x * (i - 10) ** k, 0)).toBeCloseTo(k === 0 ? 1 : 0, 11);
    for (const f of [1 / 5, 2 / 5, 1 / 7, 2 / 7, 3 / 7]) expect(gainAt(w, f)).toBeLessThan(1e-15);
  });

  it("Henderson of every odd length: sums to 1, keeps cubics, symmetric, smoothest", () => {
    for (const n of [5, 7, 9, 13, 23, 101, 1001]) {
      const w = hendersonWeights(n);
      const m = (n - 1) / 2;
      expect(Array.from(w)).toEqual(Array.from(w).reverse());
      expect(w.some((x) => Object.is(x, -0))).toBe(false);
      expect(w.reduce((a, b) => a + b, 0)).toBeCloseTo(1, 13);
      expect(w.reduce((sum, x, i) => sum + x * ((i - m) / m) ** 2, 0)).toBeCloseTo(0, 12);
      // Third differences of the optimum are orthogonal to those of any change that keeps cubics.
      const third = (v: ArrayLike<number>) => {
        const at = (i: number) => v[i] ?? 0;
        return Array.from({ length: n + 3 }, (_, i) => at(i) - 3 * at(i - 1) + 3 * at(i - 2) - at(i - 3));
      };
      if (n >= 7 && n < 50) {
        const change = new Float64Array(n);
        for (const [i, c] of [1, -6, 15, -20, 15, -6, 1].entries()) change[m - 3 + i] = c;
        const [a, b] = [third(w), third(change)];
        expect(Math.abs(a.reduce((sum, x, i) => sum + x * b[i]!, 0))).toBeLessThan(1e-12);
      }
    }
    expect(() => hendersonWeights(4)).toThrow(RangeError);
  });

  it("knows its own names, and no others", () => {
    for (const { name } of WEIGHTED_AVERAGES) expect(weightedAverage(name)).not.toBeNull();
    expect(weightedAverage("2x4")).toEqual(Float64Array.of(0.125, 0.25, 0.25, 0.25, 0.125));
    for (const name of [
      "spencer",
      "spencer-13",
      "henderson-4",
      "henderson-3",
      "henderson-1003",
      "1x5",
      "2x1001",
      "",
      "2x",
    ])
      expect(weightedAverage(name)).toBeNull();
  });
});
