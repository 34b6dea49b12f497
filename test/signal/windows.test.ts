import { describe, expect, it } from "vitest";
import { besselI0 } from "../../src/signal/kaiser.ts";
import { windowLobes } from "../../src/signal/window-figures.ts";
import {
  overlapCorrelation,
  type WindowKind,
  windowCoefficients,
  windowFigures,
} from "../../src/signal/windows.ts";
import coefficients from "../reference/01-window-coefficients.json" with { type: "json" };
import figures from "../reference/02-window-figures-of-merit.json" with { type: "json" };

const KINDS = ["rectangular", "triangular", "hann", "hamming", "blackman", "kaiser", "flat-top"] as const;
const kind = (name: string): WindowKind => (name === "bartlett" ? "triangular" : name) as WindowKind;

describe("window coefficients against reference 01", () => {
  it.each(coefficients.cases)("$id", ({ inputs, expected }) => {
    const beta = (inputs as { beta?: number }).beta;
    const w = windowCoefficients(
      kind(inputs.window),
      inputs.N,
      inputs.symmetric ? "symmetric" : "periodic",
      beta,
    );
    expect(w.length).toBe(inputs.N);
    for (const x of w) expect(Object.is(x, -0)).toBe(false);
    const near = (value: number, wanted: number, scale = 1) =>
      expect(Math.abs(value - wanted)).toBeLessThanOrEqual(coefficients.tolerance.abs * scale);
    const points = Array.isArray(expected) ? expected : expected.first10;
    for (const [n, wanted] of points.entries()) near(w[n]!, wanted);
    if (Array.isArray(expected)) {
      expect(expected.length).toBe(inputs.N);
    } else {
      near(w[50]!, expected.middle);
      near(
        w.reduce((sum, x) => sum + x, 0),
        expected.sum,
        inputs.N,
      );
      near(
        w.reduce((sum, x) => sum + x * x, 0),
        expected.sumSquares,
        inputs.N,
      );
    }
  });
});

describe("windows", () => {
  it.each(KINDS)("%s: symmetric to the last bit, and periodic = one more, less its last", (name) => {
    for (let n = 1; n <= 40; n++) {
      const w = windowCoefficients(name, n, "symmetric", 6);
      expect(Array.from(w)).toEqual(Array.from(w).reverse());
      const longer = windowCoefficients(name, n + 1, "symmetric", 6);
      if (n > 1)
        expect(Array.from(windowCoefficients(name, n, "periodic", 6))).toEqual(
          Array.from(longer.slice(0, n)),
        );
    }
  });

  it("refuses a length or a beta out of range", () => {
    for (const n of [0, -1, 2.5, Number.NaN])
      expect(() => windowCoefficients("hann", n, "symmetric")).toThrow(RangeError);
    for (const beta of [-1, 701, Number.NaN])
      expect(() => windowCoefficients("kaiser", 9, "symmetric", beta)).toThrow(RangeError);
  });

  it("the Bessel function agrees with its integral", () => {
    // I0(x) = mean of e^(x cos t) over t (Abramowitz & Stegun 9.6.16); the rule of equal steps converges at once.
    for (const x of [0, 0.1, 1, 3.7, 10, 30, 100, 500]) {
      const points = 512;
      let mean = 0;
      for (let i = 0; i < points; i++)
        mean += Math.exp(x * (Math.cos((2 * Math.PI * i) / points) - 1)) / points;
      expect(Math.abs((besselI0(x) * Math.exp(-x)) / mean - 1)).toBeLessThan(1e-12);
    }
  });
});

describe("window figures against reference 02", () => {
  it.each(figures.cases)("$id", ({ inputs, expected }) => {
    const wanted = expected.computed as Record<string, number>;
    const w = windowCoefficients(
      kind(inputs.window),
      inputs.N,
      inputs.symmetric ? "symmetric" : "periodic",
      (inputs as { beta?: number }).beta,
    );
    const near = (value: number | null, key: string) => {
      expect(Math.abs(value! / wanted[key]! - 1), key).toBeLessThan(figures.tolerance.computed.rel);
    };
    const { coherentGain, enbwBins } = windowFigures(w);
    near(coherentGain, "coherentGain");
    near(enbwBins, "enbwBins");
    const lobes = windowLobes(w);
    expect(Math.abs(lobes.highestSideLobe_dB! - wanted["highestSidelobeDb"]!)).toBeLessThan(
      figures.tolerance.computed.sidelobeAbsDb,
    );
    near(lobes.scallopingLoss_dB, "scallopingLossDb");
    near(lobes.width_3dB_bins, "width3dBBins");
    near(lobes.width_6dB_bins, "width6dBBins");
    if (wanted["overlapCorrelation50"] !== undefined) {
      near(overlapCorrelation(w, inputs.N / 2), "overlapCorrelation50");
      near(overlapCorrelation(w, inputs.N / 4), "overlapCorrelation75");
    }
  });

  it("agrees with the published table to its printed digits, but where the table is known to differ", () => {
    for (const { inputs, expected } of figures.cases) {
      const table = (expected as { harris1978Table1?: Record<string, number> }).harris1978Table1;
      if (table === undefined) continue;
      const known = Object.keys(
        (expected as unknown as Record<string, object>)["harrisDiffersFromComputedBeyond0.006"] ?? {},
      );
      const w = windowCoefficients(
        kind(inputs.window),
        inputs.N,
        "periodic",
        (inputs as { beta?: number }).beta,
      );
      const lobes = windowLobes(w);
      const check = (key: string, value: number, half: number) => {
        if (known.includes(key) || table[key] === undefined) return;
        expect(Math.abs(value - table[key]), `${inputs.window} ${key}`).toBeLessThan(half);
      };
      check("coherentGain", windowFigures(w).coherentGain, 0.006);
      check("enbwBins", windowFigures(w).enbwBins, 0.006);
      check("scallopingLossDb", lobes.scallopingLoss_dB, 0.006);
      check("width3dBBins", lobes.width_3dB_bins!, 0.015);
      check("width6dBBins", lobes.width_6dB_bins!, 0.006);
    }
  });

  it("the flat-top keeps the height of a tone anywhere between bins within 0.01 dB", () => {
    const w = windowCoefficients("flat-top", 1024, "periodic");
    const { enbwBins, coherentGain } = windowFigures(w);
    const lobes = windowLobes(w);
    expect(Math.abs(lobes.scallopingLoss_dB)).toBeLessThan(0.01);
    // Figures printed for this window: 3.77 bins, side lobes near -93 dB (recalled from memory).
    expect(enbwBins).toBeCloseTo(3.77, 2);
    expect(coherentGain).toBeCloseTo(0.2156, 4);
    expect(lobes.highestSideLobe_dB!).toBeLessThan(-85);
  });
});
