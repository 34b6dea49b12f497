import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { CompensatedSum } from "../../src/signal/compensated-sum.ts";
import { fitPolynomial, PolynomialFit } from "../../src/signal/polynomial-fit.ts";
import reference from "../reference/12-polynomial-detrend.json" with { type: "json" };
import { nearGaussian } from "./noise.ts";

const largest = (list: Iterable<number>) => Array.from(list).reduce((m, v) => Math.max(m, Math.abs(v)), 0);

/** Digits of agreement: NIST's log relative error, and -log10 of the error where the certified value is 0. */
function digits(got: number, certified: number): number {
  const error = certified === 0 ? Math.abs(got) : Math.abs(got / certified - 1);
  return error === 0 ? 16 : Math.min(16, -Math.log10(error));
}

const caseOf = (id: string) => reference.cases.find((c) => c.id === id)!;

describe("NIST StRD certified coefficients, in raw powers", () => {
  it.each(["Norris", "Pontius", "Wampler1", "Wampler3"])("%s to at least 12 digits", (id) => {
    const { inputs, expected } = caseOf(id);
    const fit = fitPolynomial(inputs.x!, inputs.y!, inputs.degree!)!;
    const powers = fit.powers(0);
    expected.certifiedCoefficientsLowToHigh!.forEach((text, k) => {
      expect(digits(powers[k]!, Number(text))).toBeGreaterThan(12);
    });
  });

  it("Wampler2 to at least 12 digits", () => {
    // Source: NIST StRD Wampler2, y = sum of (x / 10)^k, five decimals; certified coefficients 10^-k (recalled
    // from memory; both follow from the definition).
    const x = Array.from({ length: 21 }, (_, i) => i);
    const y = x.map((v) => Number([0, 1, 2, 3, 4, 5].reduce((s, k) => s + (v / 10) ** k, 0).toFixed(5)));
    const powers = fitPolynomial(x, y, 5)!.powers(0);
    for (let k = 0; k <= 5; k++) expect(digits(powers[k]!, 10 ** -k)).toBeGreaterThan(12);
  });
});

describe("residuals against exact rational arithmetic, reference 12", () => {
  const fits = reference.cases.filter((c) => c.inputs.degree !== undefined && c.inputs.degree <= 5);
  it.each(fits)("$id", ({ inputs, expected }) => {
    const x = inputs.x!;
    const y = inputs.y!;
    const fit = fitPolynomial(x, y, inputs.degree!)!;
    const limit = 1e-11 * largest(y);
    expected.exactResiduals!.forEach((wanted, i) => {
      expect(Math.abs(y[i]! - fit.valueAt(x[i]!) - wanted)).toBeLessThanOrEqual(limit);
    });
  });

  it("epoch seconds to the third power keep their coefficients even about zero", () => {
    const { inputs, expected } = caseOf("epoch-seconds-cubic");
    const powers = fitPolynomial(inputs.x!, inputs.y!, 3)!.powers(0);
    expected.exactCoefficientsLowToHigh!.forEach((wanted, k) => {
      expect(digits(powers[k]!, wanted)).toBeGreaterThan(12);
    });
  });

  it.each([
    ["scipy-detrend-constant", 0, [0, 24]],
    ["scipy-detrend-linear", 1, [0, 24]],
    ["scipy-detrend-linear-breakpoints", 1, [0, 8, 15, 24]],
  ] as const)("%s", (id, degree, cuts) => {
    const { inputs, expected } = caseOf(id);
    for (let c = 1; c < cuts.length; c++) {
      const from = cuts[c - 1]!;
      const y = inputs.x!.slice(from, cuts[c]!);
      const t = y.map((_, i) => i);
      const fit = fitPolynomial(t, y, degree)!;
      for (const i of t)
        expect(Math.abs(y[i]! - fit.valueAt(i) - expected.y![from + i]!)).toBeLessThanOrEqual(1e-11);
    }
  });
});

describe("NIST StRD univariate data: mean and standard deviation", () => {
  const alternating = (first: number, low: number, high: number) =>
    Array.from({ length: 1001 }, (_, i) => (i === 0 ? first : i % 2 === 1 ? low : high));
  const data: Record<string, number[]> = {
    NumAcc1: caseOf("NumAcc1").inputs.y!,
    NumAcc2: alternating(1.2, 1.1, 1.3),
    NumAcc3: alternating(1000000.2, 1000000.1, 1000000.3),
    Michelso: caseOf("Michelso").inputs.y!,
  };
  it.each(Object.keys(data))("%s", (id) => {
    const { expected, tolerance } = caseOf(id);
    const y = data[id]!;
    const fit = fitPolynomial(
      y.map((_, i) => i),
      y,
      0,
    )!;
    const mean = fit.powers(0)[0]!;
    const squares = new CompensatedSum();
    for (const v of y) squares.add((v - mean) ** 2);
    expect(Math.abs(mean / expected.exactMean! - 1)).toBeLessThanOrEqual(tolerance.meanRel!);
    expect(Math.abs(Math.sqrt(squares.total / (y.length - 1)) / expected.exactSd! - 1)).toBeLessThanOrEqual(
      tolerance.sdRel!,
    );
  });
});

describe("polynomial fit", () => {
  it("leaves exactly nothing of a constant", () => {
    fc.assert(
      fc.property(
        fc.double({ noNaN: true, min: -1e200, max: 1e200 }),
        fc.integer({ min: 0, max: 5 }),
        fc.double({ noNaN: true, min: -1e9, max: 1e9 }),
        (value, degree, origin) => {
          const t = Array.from({ length: 17 }, (_, i) => origin + i * 0.3);
          const fit = fitPolynomial(t, new Array(17).fill(value), degree)!;
          for (const at of t) expect(value - fit.valueAt(at) === 0).toBe(true);
        },
      ),
    );
  });

  it("gives a polynomial back, about any origin", () => {
    fc.assert(
      fc.property(
        fc.array(fc.integer({ min: -100, max: 100 }), { minLength: 1, maxLength: 6 }),
        fc.integer({ min: -40, max: 40 }),
        (a, origin) => {
          const t = Array.from({ length: 41 }, (_, i) => i - 20);
          const y = t.map((v) => a.reduceRight((sum, c) => sum * (v - origin) + c, 0));
          const fit = fitPolynomial(t, y, a.length - 1)!;
          const powers = fit.powers(origin);
          a.forEach((c, k) => {
            expect(Math.abs(powers[k]! - c)).toBeLessThan(1e-12 * Math.max(1, ...a.map(Math.abs)));
          });
          for (const [i, v] of t.entries())
            expect(Math.abs(fit.valueAt(v) - y[i]!)).toBeLessThanOrEqual(1e-13 * largest(y));
        },
      ),
    );
  });

  it("names its Legendre coefficients over the span given", () => {
    const fit = new PolynomialFit(2, 10, 30);
    for (let t = 10; t <= 30; t++) {
      const u = (t - 20) / 10;
      fit.add(t, 7 + 3 * u + 5 * (1.5 * u * u - 0.5));
    }
    expect(fit.count).toBe(21);
    const { legendre } = fit.solve()!;
    expect(Array.from(legendre).map((c) => Number(c.toFixed(12)))).toEqual([7, 3, 5]);
  });

  it("has no answer for fewer distinct points than coefficients", () => {
    for (let degree = 0; degree <= 5; degree++) {
      const fit = new PolynomialFit(degree, 0, 100);
      for (let i = 0; i < degree; i++) for (let repeat = 0; repeat < 4; repeat++) fit.add(10 * i, repeat);
      expect(fit.solve()).toBeNull();
      fit.add(93, 1);
      expect(fit.solve()).not.toBeNull();
    }
    expect(fitPolynomial([], [], 0)).toBeNull();
    expect(fitPolynomial([1, 2], [Number.NaN, Number.NaN], 0)).toBeNull();
    expect(fitPolynomial([5], [3], 0)!.valueAt(5)).toBe(3);
    expect(fitPolynomial([5, 5], [3, 4], 1)).toBeNull();
  });

  it("stays right when the points fill two hundredths of the span, and gives up on a thousandth", () => {
    const noise = nearGaussian(7, 500);
    const wide = new PolynomialFit(5, 0, 1);
    const own = new PolynomialFit(5, 0.6, 0.62);
    const narrow = new PolynomialFit(5, 0, 1);
    const times = Array.from(noise, (_, i) => 0.6 + (0.02 * i) / 499);
    for (const [i, t] of times.entries()) {
      wide.add(t, noise[i]!);
      own.add(t, noise[i]!);
      narrow.add(0.6 + (t - 0.6) / 20, noise[i]!);
    }
    const a = wide.solve()!;
    const b = own.solve()!;
    for (const t of times) expect(Math.abs(a.valueAt(t) - b.valueAt(t))).toBeLessThan(1e-9);
    expect(narrow.solve()).toBeNull();
  });

  it("ignores NaN and takes points in any order", () => {
    const t = [3, 1, Number.NaN, 2, 5, 4];
    const y = [9, 1, 5, 4, Number.NaN, 16];
    const fit = fitPolynomial(t, y, 2)!;
    expect(Array.from(fit.powers(0), (c) => Math.abs(Number(c.toFixed(12))))).toEqual([0, 0, 1]);
  });

  it("refuses a degree or a span that it cannot take", () => {
    for (const degree of [-1, 6, 1.5, Number.NaN])
      expect(() => new PolynomialFit(degree, 0, 1)).toThrow(RangeError);
    expect(() => new PolynomialFit(1, 2, 1)).toThrow(RangeError);
    expect(() => new PolynomialFit(1, 0, Number.POSITIVE_INFINITY)).toThrow(RangeError);
  });
});
