import { describe, expect, it } from "vitest";
import { DesignError } from "../../src/signal/design-error.ts";
import { groupDelayOf } from "../../src/signal/response.ts";
import { PolynomialWindow, savitzkyGolayTaps } from "../../src/signal/savitzky-golay.ts";
import reference from "../reference/07-savitzky-golay.json" with { type: "json" };

const weightCases = reference.cases.filter((c) => c.expected.weights !== undefined);
const filterCases = reference.cases.filter((c) => c.inputs.edge === "interp");

describe("Savitzky-Golay against reference 07", () => {
  it.each(weightCases)("$id", ({ inputs, expected }) => {
    const window = new PolynomialWindow(inputs.window, inputs.polyorder);
    const row = window.row(inputs.evaluateAtOffsetFromCentre ?? 0, inputs.deriv);
    for (const [j, wanted] of expected.weights!.entries())
      expect(Math.abs(row[j]! - wanted)).toBeLessThan(reference.tolerance.weightsAbs);
    if (expected.varianceReduction !== undefined)
      expect(row.reduce((sum, w) => sum + w * w, 0)).toBeCloseTo(expected.varianceReduction, 12);
  });

  it.each(filterCases)("$id: one polynomial fitted at each end", ({ inputs, expected }) => {
    const x = inputs.x!;
    const m = (inputs.window - 1) / 2;
    const window = new PolynomialWindow(inputs.window, inputs.polyorder);
    const scale = Math.max(...x.map(Math.abs));
    for (const [i, wanted] of expected.y!.entries()) {
      const centre = Math.min(Math.max(i, m), x.length - 1 - m);
      const row = window.row(i - centre);
      const y = row.reduce((sum, w, j) => sum + w * x[centre - m + j]!, 0);
      expect(Math.abs(y - wanted)).toBeLessThan(1e-12 * scale);
    }
  });
});

describe("Savitzky-Golay", () => {
  it("keeps every polynomial of its degree, at every point of the window, at high degree too", () => {
    for (const [length, degree] of [
      [5, 2],
      [21, 6],
      [101, 4],
      [101, 30],
      [2001, 7],
      [41, 40],
    ] as const) {
      const window = new PolynomialWindow(length, degree);
      const m = (length - 1) / 2;
      for (const offset of [-m, -1, 0, Math.floor(m / 2), m])
        for (let k = 0; k <= degree; k++) {
          // Chebyshev polynomials: of every degree, and at most 1 on the window.
          const t = (j: number) => Math.cos(k * Math.acos(j / m));
          const y = window.row(offset).reduce((sum, w, j) => sum + w * t(j - m), 0);
          expect(Math.abs(y - t(offset)), `${length} ${degree} ${offset} ${k}`).toBeLessThan(1e-11);
        }
    }
  });

  it("derivatives agree with those of the polynomial", () => {
    const window = new PolynomialWindow(31, 5);
    const cubic = (x: number) => 0.5 - x + 0.02 * x * x + 0.001 * x ** 3;
    const slope = (x: number) => -1 + 0.04 * x + 0.003 * x * x;
    const bend = (x: number) => 0.04 + 0.006 * x;
    for (const at of [-15, -4, 0, 9, 15]) {
      const apply = (d: number) => window.row(at, d).reduce((sum, w, j) => sum + w * cubic(j - 15), 0);
      expect(apply(1)).toBeCloseTo(slope(at), 10);
      expect(apply(2)).toBeCloseTo(bend(at), 10);
      expect(apply(4)).toBeCloseTo(0, 10);
    }
  });

  it("centred taps are symmetric to the last bit; trailing taps estimate the newest sample", () => {
    const centred = savitzkyGolayTaps(25, 4, "centre");
    expect(Array.from(centred)).toEqual(Array.from(centred).reverse());
    expect(groupDelayOf(centred)).toMatchObject({ samples: 12, constant: true });
    const trailing = savitzkyGolayTaps(9, 2, "trailing-end");
    // Convolution: taps[0] weighs the newest sample, here 0 on a parabola.
    const y = trailing.reduce((sum, w, i) => sum + w * (3 + 2 * -i + 0.5 * i * i), 0);
    expect(y).toBeCloseTo(3, 12);
    expect(groupDelayOf(trailing).constant).toBe(false);
    expect(groupDelayOf(trailing).samples).toBeCloseTo(0, 10);
  });

  it("degrees 2 and 3 are the same at the centre", () => {
    const [a, b] = [savitzkyGolayTaps(11, 2, "centre"), savitzkyGolayTaps(11, 3, "centre")];
    for (let i = 0; i < 11; i++) expect(Math.abs(a[i]! - b[i]!)).toBeLessThan(1e-15);
  });

  it("refuses even lengths and degrees without points to carry them", () => {
    for (const [n, p] of [
      [4, 2],
      [5, 5],
      [5, -1],
      [5, 1.5],
      [0, 0],
      [20_003, 2],
      [101, 41],
    ] as const)
      expect(() => savitzkyGolayTaps(n, p, "centre")).toThrow(DesignError);
    expect(() => new PolynomialWindow(5, 2).row(3)).toThrow(RangeError);
  });
});
