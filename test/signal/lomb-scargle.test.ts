import { describe, expect, it } from "vitest";
import { lombScargle } from "../../src/signal/lomb-scargle.ts";
import reference from "../reference/18-lomb-scargle.json" with { type: "json" };
import { nearGaussian, uniform } from "./noise.ts";

const near = (got: number, wanted: number) =>
  expect(Math.abs(got - wanted)).toBeLessThanOrEqual(1e-9 * Math.abs(wanted) + 1e-12);

describe("Lomb-Scargle against reference 18", () => {
  it("uneven", () => {
    const { inputs, expected } = reference.cases.find((c) => c.id === "uneven")!;
    const t = Float64Array.from(inputs.t!);
    const y = Float64Array.from(inputs.y!);
    const f = Float64Array.from(inputs.frequencies!);
    const removed = lombScargle(t, y, f, "removed");
    const fitted = lombScargle(t, y, f, "fitted");
    for (const j of f.keys()) {
      near(removed.power[j]!, expected.scipyRawMeanRemoved![j]!);
      near(removed.share[j]!, expected.scipyNormalizedMeanRemoved![j]!);
      near(removed.share[j]!, expected.astropyStandardFitMeanFalseCentred![j]!);
      near(removed.power[j]!, expected.astropyPsdFitMeanFalse![j]!);
      near(fitted.share[j]!, expected.astropyStandardFitMean![j]!);
    }
    const peak = removed.power.indexOf(Math.max(...removed.power));
    expect(f[peak]).toBe(expected.peakFrequency);
  });

  it("even-equals-periodogram", () => {
    const { inputs, expected } = reference.cases.find((c) => c.id === "even-equals-periodogram")!;
    const y = nearGaussian(inputs.seed!, inputs.n!);
    const t = Float64Array.from(y, (_, i) => i);
    const f = Float64Array.from(expected.power!, (_, i) => (i + 1) / inputs.n!);
    const { power } = lombScargle(t, y, f, "removed");
    for (const [j, wanted] of expected.power!.entries()) near(power[j]!, wanted);
  });
});

describe("Lomb-Scargle", () => {
  const t = uniform(42, 300).map((u) => 1000 * u);
  const f = Float64Array.from({ length: 400 }, (_, i) => 0.001 * (i + 1) + 0.0003);

  it("finds a sine of known power under uneven sampling, missing values left out", () => {
    const y = t.map((v, i) => (i % 7 === 3 ? Number.NaN : 5 + 2 * Math.sin(2 * Math.PI * 0.1233 * v + 0.4)));
    for (const mean of ["removed", "fitted"] as const) {
      const { power, share } = lombScargle(t, y, f, mean);
      const peak = share.indexOf(Math.max(...share));
      expect(f[peak]).toBeCloseTo(0.1233, 9);
      if (mean === "fitted") {
        // A sine and a mean explain all there is: the power is half the sum of squares about the mean.
        const seen = Array.from(y).filter((v) => !Number.isNaN(v));
        const centre = seen.reduce((sum, v) => sum + v, 0) / seen.length;
        const squares = seen.reduce((sum, v) => sum + (v - centre) ** 2, 0);
        expect(share[peak]).toBeCloseTo(1, 12);
        expect(power[peak]! / (squares / 2)).toBeCloseTo(1, 12);
      }
    }
  });

  it("of a sine of amplitude a on n even samples is n a^2 / 4", () => {
    const even = Float64Array.from({ length: 200 }, (_, i) => i);
    const y = even.map((i) => 3 * Math.cos((2 * Math.PI * 17 * i) / 200 + 1));
    expect(lombScargle(even, y, Float64Array.of(17 / 200), "removed").power[0]).toBeCloseTo((200 * 9) / 4, 9);
  });

  it("does not depend on where time begins, nor on a constant", () => {
    const y = t.map((v, i) => Math.sin(v) + nearGaussian(9, 300)[i]!);
    // Multiples of 2^-20 move without rounding.
    const grid = t.map((v) => Math.round(v * 2 ** 20) / 2 ** 20);
    const a = lombScargle(grid, y, f, "fitted");
    const b = lombScargle(
      grid.map((v) => v + 2 ** 30),
      y.map((v) => v + 1000),
      f,
      "fitted",
    );
    for (const j of f.keys()) expect(Math.abs(a.share[j]! - b.share[j]!)).toBeLessThan(1e-10);
  });

  it("gives shares between 0 and 1", () => {
    for (const mean of ["removed", "fitted"] as const)
      for (const share of lombScargle(t, nearGaussian(3, 300), f, mean).share) {
        expect(share).toBeGreaterThanOrEqual(0);
        expect(share).toBeLessThanOrEqual(1 + 1e-12);
      }
  });

  it("on even samples at half the rate, where sines vanish, does not divide by nothing", () => {
    const even = Float64Array.from({ length: 16 }, (_, i) => i);
    const y = even.map((i) => (-1) ** i);
    const { share } = lombScargle(even, y, Float64Array.of(0.5, 1), "removed");
    expect(share[0]).toBeCloseTo(1, 12);
    expect(share[1]).toBeCloseTo(0, 12);
    expect(lombScargle(even, y, Float64Array.of(0.5, 1), "fitted").share[0]).toBeCloseTo(1, 12);
  });

  it("has no answer for too few samples or a constant", () => {
    const few = Float64Array.of(1, 2);
    expect(lombScargle(few, few, f, "removed").power[0]).toBeNaN();
    expect(lombScargle(t, new Float64Array(300).fill(4), f, "fitted").share[0]).toBeNaN();
  });
});
