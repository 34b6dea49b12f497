import { describe, expect, it } from "vitest";
import { AllanFamily, octaveFactors } from "../../src/signal/allan.ts";
import { fitPolynomial } from "../../src/signal/polynomial-fit.ts";
import { median } from "../../src/signal/robust.ts";
import reference from "../reference/20-allan-variance.json" with { type: "json" };
import { nearGaussian, uniform } from "./noise.ts";

describe("Allan family against reference 20", () => {
  it.each(reference.cases)("$id", ({ inputs, expected }) => {
    const y =
      inputs.frequency === undefined ? uniform(inputs.seed!, inputs.n!) : Float64Array.from(inputs.frequency);
    const m = inputs.averagingFactor;
    const family = new AllanFamily(y, inputs.tau0);
    const means = Float64Array.from({ length: Math.floor(y.length / m) }, (_, k) => {
      const part = y.subarray(k * m, (k + 1) * m);
      return part.reduce((s, v) => s + v, 0) / m;
    });
    const index = means.map((_, i) => i + 1);
    const [intercept, slope] = fitPolynomial(index, means, 1)!.powers(0);
    const got: Record<string, number> = {
      adev: family.allan(m),
      oadev: family.overlappingAllan(m),
      mdev: family.modifiedAllan(m),
      tdev: family.time(m),
      hdev: family.hadamard(m),
      ohdev: family.overlappingHadamard(m),
      median: median(means),
      slope: slope!,
      intercept: intercept!,
    };
    const computed = expected.computed as Record<string, number>;
    const published = expected.publishedFromMemory as Record<string, string>;
    let compared = 0;
    for (const [name, value] of Object.entries(got)) {
      if (computed[name] !== undefined) {
        expect(Math.abs(value / computed[name] - 1)).toBeLessThan(1e-10);
        compared++;
      }
      if (published[name] !== undefined)
        expect(Math.abs(value / Number(published[name]) - 1)).toBeLessThan(5e-7);
    }
    expect(compared).toBeGreaterThanOrEqual(8);
  });
});

describe("Allan family", () => {
  it("of white noise falls as the root of the averaging time", () => {
    const family = new AllanFamily(nearGaussian(20310303, 40_000), 1);
    // Relative standard error of the overlapping estimate of white noise: about sqrt(3 m / (4 n)).
    for (const m of octaveFactors(40_000).filter((k) => k <= 256))
      expect(Math.abs(family.overlappingAllan(m) * Math.sqrt(m) - 1)).toBeLessThan(
        4 * Math.sqrt((3 * m) / 160_000) + 0.01,
      );
  });

  it("of a steady drift has the closed form, and the Hadamard deviations see none of it", () => {
    const drift = Float64Array.from({ length: 1000 }, (_, i) => 1e6 + 0.25 * i);
    const family = new AllanFamily(drift, 10);
    for (const m of [1, 7, 100]) {
      for (const value of [family.allan(m), family.overlappingAllan(m), family.modifiedAllan(m)])
        expect(value / ((0.25 * m) / Math.SQRT2)).toBeCloseTo(1, 10);
      expect(family.hadamard(m)).toBeLessThan(1e-10);
      expect(family.overlappingHadamard(m)).toBeLessThan(1e-10);
      expect(family.tau(m)).toBe(10 * m);
    }
  });

  it("is exactly blind to a constant, however large", () => {
    const family = new AllanFamily(new Float64Array(50).fill(1e9 + 0.1), 1);
    for (const m of [1, 5])
      expect([family.allan(m), family.modifiedAllan(m), family.hadamard(m)]).toEqual([0, 0, 0]);
  });

  it("modified deviation equals its definition", () => {
    const y = uniform(5, 60);
    const x = [0];
    for (const v of y) x.push(x.at(-1)! + v);
    for (const m of [1, 2, 5, 20]) {
      let sum = 0;
      let count = 0;
      for (let j = 0; j + 3 * m - 1 < x.length; j++, count++) {
        let inner = 0;
        for (let i = j; i < j + m; i++) inner += x[i + 2 * m]! - 2 * x[i + m]! + x[i]!;
        sum += inner ** 2;
      }
      const wanted = Math.sqrt(sum / count / 2) / (m * m);
      expect(new AllanFamily(y, 1).modifiedAllan(m) / wanted).toBeCloseTo(1, 11);
    }
  });

  it("has no answer from too few readings, and refuses what is no factor", () => {
    const family = new AllanFamily(uniform(5, 9), 1);
    expect(family.allan(5)).toBeNaN();
    expect(family.overlappingAllan(4)).not.toBeNaN();
    expect(family.hadamard(4)).toBeNaN();
    expect(family.modifiedAllan(4)).toBeNaN();
    expect(family.modifiedAllan(3)).not.toBeNaN();
    expect(new AllanFamily(new Float64Array(0), 1).overlappingAllan(1)).toBeNaN();
    expect(() => family.allan(0)).toThrow(RangeError);
    expect(() => family.allan(1.5)).toThrow(RangeError);
    expect(() => new AllanFamily(uniform(5, 9), 0)).toThrow(RangeError);
    expect(octaveFactors(17)).toEqual([1, 2, 4]);
  });
});
