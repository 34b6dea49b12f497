import { describe, expect, it } from "vitest";
import {
  chiSquareQuantile,
  chiSquareUpperQuantile,
  confidenceFactors,
  equivalentDegreesOfFreedom,
} from "../../src/signal/chi-square.ts";
import { gammaP, gammaQ, inverseGammaP } from "../../src/signal/incomplete-gamma.ts";
import { windowCoefficients } from "../../src/signal/windows.ts";

const relative = (got: number, wanted: number) => Math.abs(got / wanted - 1);

describe("chi-square quantiles", () => {
  // Source: M. Abramowitz & I. A. Stegun (1964), table 26.8, to its six digits (values recalled from memory).
  it.each([
    [1, "0.0000392704", "0.000982069", "5.02389", "7.87944"],
    [2, "0.0100251", "0.0506356", "7.37776", "10.5966"],
    [10, "2.15585", "3.24697", "20.4831", "25.1882"],
    [30, "13.7867", "16.7908", "46.9792", "53.6720"],
    [100, "67.3276", "74.2219", "129.561", "140.169"],
  ])("agree with the published table at %i degrees of freedom", (dof, q005, q025, q975, q995) => {
    const shown = (x: number) => Number(x.toPrecision(6));
    // One unit in the sixth digit: the table rounds 20.48318 down and others up.
    const near = (p: number, text: string) =>
      expect(relative(shown(chiSquareQuantile(p, dof)), Number(text))).toBeLessThanOrEqual(6e-6);
    near(0.005, q005);
    near(0.025, q025);
    near(0.975, q975);
    near(0.995, q995);
  });

  // Source: series and continued fraction in 40-digit arithmetic (mpmath), the root to 20 digits, rounded to a double.
  it.each([
    [1, 0.000982069117175256, 0.4549364231195728, 5.023886187314889],
    [1.7, 0.024578860686948402, 1.0977945221763534, 6.729887825681827],
    [2, 0.05063561596857975, 1.3862943611198906, 7.3777589082278725],
    [13.4, 5.255033951796398, 12.739554130542171, 25.290711354826612],
    [100, 74.22192747492373, 99.33412923598846, 129.5611971858366],
    [12345.6, 12039.521019020976, 12344.933339733752, 12655.467548608602],
    [1e6, 997230.0871432901, 999999.3333334123, 1002773.701467926],
  ])("agree to 1e-12 at %f degrees of freedom", (dof, low, middle, high) => {
    expect(relative(chiSquareQuantile(0.025, dof), low)).toBeLessThan(1e-12);
    expect(relative(chiSquareQuantile(0.5, dof), middle)).toBeLessThan(1e-12);
    expect(relative(chiSquareQuantile(0.975, dof), high)).toBeLessThan(1e-12);
    expect(relative(chiSquareUpperQuantile(0.025, dof), high)).toBeLessThan(1e-12);
  });

  it("have the closed form at two degrees of freedom, far into the tails", () => {
    for (const q of [0.9, 0.5, 1e-3, 1e-12, 1e-100, 1e-300])
      expect(relative(chiSquareUpperQuantile(q, 2), -2 * Math.log(q))).toBeLessThan(1e-12);
    for (const p of [0.5, 1e-3, 1e-12, 1e-100])
      expect(relative(chiSquareQuantile(p, 2), -2 * Math.log1p(-p))).toBeLessThan(1e-12);
  });

  it("undo the distribution function over the whole range", () => {
    for (let dof = 1; dof <= 1e6; dof *= 1.9)
      for (const p of [1e-9, 1e-4, 0.05, 0.4, 0.6, 0.95]) {
        const x = inverseGammaP(dof / 2, p);
        expect(relative(gammaP(dof / 2, x), p)).toBeLessThan(1e-9);
        expect(relative(gammaP(dof / 2, x) + gammaQ(dof / 2, x), 1)).toBeLessThan(1e-14);
      }
  });

  it("have ends, and refuse what is no probability and no count", () => {
    expect(chiSquareQuantile(0, 5)).toBe(0);
    expect(chiSquareQuantile(1, 5)).toBe(Number.POSITIVE_INFINITY);
    expect(chiSquareUpperQuantile(0, 5)).toBe(Number.POSITIVE_INFINITY);
    expect(() => chiSquareQuantile(1.1, 5)).toThrow(RangeError);
    expect(() => chiSquareQuantile(0.5, 0)).toThrow(RangeError);
  });
});

describe("confidence factors", () => {
  it("are the textbook ones", () => {
    const { lower, upper } = confidenceFactors(10, 0.95);
    expect(lower).toBeCloseTo(10 / 20.4831773507, 9);
    expect(upper).toBeCloseTo(10 / 3.2469727802, 9);
  });
  it("close in on 1", () => {
    const { lower, upper } = confidenceFactors(1e6, 0.95);
    expect(lower).toBeGreaterThan(0.997);
    expect(upper).toBeLessThan(1.003);
  });
});

describe("equivalent degrees of freedom", () => {
  it("are two a segment when segments do not overlap", () => {
    const hann = windowCoefficients("hann", 64, "periodic");
    expect(equivalentDegreesOfFreedom(hann, 64, 10)).toBe(20);
    expect(equivalentDegreesOfFreedom(hann, 32, 1)).toBe(2);
  });
  it("of half-overlapping Hann segments have the closed form: squared correlation 1/36", () => {
    const hann = windowCoefficients("hann", 64, "periodic");
    for (const k of [2, 7, 100])
      expect(equivalentDegreesOfFreedom(hann, 32, k)).toBeCloseTo((2 * k) / (1 + (2 * (1 - 1 / k)) / 36), 10);
  });
  it("of half-overlapping rectangular segments: squared correlation 1/4", () => {
    const flat = windowCoefficients("rectangular", 64, "periodic");
    expect(equivalentDegreesOfFreedom(flat, 32, 9)).toBeCloseTo(18 / (1 + (2 * (1 - 1 / 9)) / 4), 10);
  });
});
