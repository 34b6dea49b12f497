import { describe, expect, it } from "vitest";
import { DesignError } from "../../src/signal/design-error.ts";
import { designEquiripple } from "../../src/signal/equiripple.ts";
import { weightedBands } from "../../src/signal/equiripple-search.ts";
import { bandIntegrals, solveNormalEquations } from "../../src/signal/least-squares.ts";
import { keeps, type Mask } from "../../src/signal/mask.ts";
import { gainAt } from "../../src/signal/response.ts";
import { achievedBy, designBySpecification } from "../../src/signal/specification.ts";
import { designWindowedSinc } from "../../src/signal/windowed-sinc.ts";
import { kept, randomMask, shapes } from "./masks.ts";

describe("by specification: windowed sinc", () => {
  it.each(shapes)("%s: keeps the mask, and no Kaiser window two taps shorter does", (shape) => {
    for (let i = 0; i < 12; i++) {
      const mask = randomMask(shape, 1000 + i);
      const made = kept(mask, "windowed-sinc");
      const edges = mask.pass.map((p, k) => (p + mask.stop[k]!) / 2);
      // High-pass and band-stop have odd lengths only.
      const shorter = shape === "high-pass" || shape === "band-stop" ? [2] : [1, 2];
      for (const less of shorter)
        for (let beta = Math.max(0, made.beta! - 2); beta < made.beta! + 2; beta += 0.05) {
          const n = made.taps.length - less;
          if (n < 3) break;
          const taps = designWindowedSinc({ taps: n, shape, edges, window: "kaiser", beta });
          expect(keeps(achievedBy(taps, mask), mask), `${n} taps, beta ${beta}`).toBe(false);
        }
    }
  });

  it("odd lengths when asked, even ones when shorter and allowed", () => {
    for (let i = 0; i < 10; i++)
      expect(
        designBySpecification({ ...randomMask("low-pass", i), method: "windowed-sinc", parity: "odd" }).taps
          .length % 2,
      ).toBe(1);
  });

  it("refuses what cannot be met, and says why", () => {
    const mask = {
      shape: "low-pass",
      pass: [0.1],
      stop: [0.1001],
      ripple_dB: 0.01,
      attenuation_dB: 80,
    } as const;
    expect(() => designBySpecification({ ...mask, method: "windowed-sinc" })).toThrow(DesignError);
    const bad: Partial<Mask>[] = [
      { stop: [0.05] },
      { stop: [0.6] },
      { pass: [-0.1] },
      { stop: [] },
      { pass: [0.1, 0.2], stop: [0.2] },
      { ripple_dB: 0 },
      { attenuation_dB: Number.NaN },
      { attenuation_dB: 400 },
      { shape: "high-pass" },
      { shape: "band-pass", pass: [0.1, 0.2], stop: [0.15, 0.3] },
    ];
    for (const change of bad)
      expect(() =>
        designBySpecification({ ...mask, stop: [0.2], ...change, method: "windowed-sinc" }),
      ).toThrow(DesignError);
  });

  it("is done in reasonable time at thousands of taps", () => {
    const start = performance.now();
    const made = designBySpecification({
      shape: "low-pass",
      pass: [0.002],
      stop: [0.003],
      ripple_dB: 0.01,
      attenuation_dB: 80,
      method: "windowed-sinc",
      parity: "odd",
    });
    expect(made.taps.length).toBeGreaterThan(4000);
    expect(performance.now() - start).toBeLessThan(5000);
  });
});

describe("by specification: equiripple", () => {
  it.each(shapes)("%s: keeps the mask, and no filter two taps shorter can", (shape) => {
    for (let i = 0; i < 10; i++) {
      const mask = randomMask(shape, 2000 + i);
      const made = kept(mask, "equiripple");
      const n = made.taps.length;
      expect(made.method).toBe("equiripple");
      if (n <= 3) continue;
      // A lower bound above 1 proves it for every filter of that length and symmetry, by whatever method.
      expect(designEquiripple(n - 2, weightedBands(mask)).lowerBound, `${n - 2} taps`).toBeGreaterThan(1);
      if (shape === "low-pass" || shape === "band-pass")
        expect(designEquiripple(n - 1, weightedBands(mask)).lowerBound, `${n - 1} taps`).toBeGreaterThan(1);
    }
  });

  it("is never longer than the other methods", () => {
    for (let i = 0; i < 8; i++)
      for (const shape of shapes) {
        const mask = randomMask(shape, 3000 + i);
        const least = kept(mask, "equiripple").taps.length;
        for (const method of ["windowed-sinc", "least-squares"] as const)
          expect(designBySpecification({ ...mask, method }).taps.length).toBeGreaterThanOrEqual(least);
      }
  });

  it("warns when the gain runs free between the bands", () => {
    const mask: Mask = {
      shape: "band-pass",
      pass: [0.15, 0.25],
      stop: [0.13, 0.4],
      ripple_dB: 0.5,
      attenuation_dB: 40,
    };
    const made = kept(mask, "equiripple");
    expect(made.largestGain).toBeGreaterThan(2);
    expect(made.warning).toMatch(/dB above the passband/);
    // auto does not take it, and says what it would have cost.
    const calm = kept(mask, "auto");
    expect(calm.largestGain).toBeLessThan(1.5);
    expect(calm.warning).toBeUndefined();
    const would = Number(/; (\d+) taps would do/.exec(calm.why)?.[1]);
    expect(would).toBeGreaterThanOrEqual(made.taps.length);
    expect(would).toBeLessThan(calm.taps.length);
    expect(calm.taps.length).toBeLessThan(kept(mask, "windowed-sinc").taps.length);
  });
});

describe("by specification: least squares", () => {
  it.each(shapes)("%s: keeps the mask, and no weighting two taps shorter does", (shape) => {
    for (let i = 0; i < 8; i++) {
      const mask = randomMask(shape, 4000 + i);
      const made = kept(mask, "least-squares");
      const n = made.taps.length - 2;
      if (n < 1) continue;
      const bands = weightedBands(mask);
      const parts = bands.map((band) => bandIntegrals(n, band));
      for (let decades = -3; decades <= 9; decades += 0.1) {
        const weights = bands.map((b) => (b.gain === 0 ? 10 ** decades : 1));
        const shorter = solveNormalEquations(n, parts, weights).taps;
        expect(keeps(achievedBy(shorter, mask), mask), `${n} taps, weight 1e${decades}`).toBe(false);
      }
    }
  });
});

describe("by specification: auto", () => {
  it("takes the shortest that leaves a steady level where it is, and says why in one sentence", () => {
    for (let i = 0; i < 8; i++)
      for (const shape of ["low-pass", "high-pass"] as const) {
        const mask = randomMask(shape, 5000 + i);
        const made = kept(mask, "auto");
        const taps = (method: "windowed-sinc" | "equiripple", more: Partial<Mask> = {}) =>
          designBySpecification({ ...mask, ...more, method }).taps.length;
        // Never longer than a Kaiser window, nor than equiripple at half the ripple (which can be scaled to 1);
        // never shorter than equiripple, which may shift a level.
        expect(made.taps.length).toBeGreaterThanOrEqual(taps("equiripple"));
        expect(made.taps.length).toBeLessThanOrEqual(taps("windowed-sinc"));
        const half = mask.ripple_dB / 2;
        const tighter = { ripple_dB: half, attenuation_dB: mask.attenuation_dB + half };
        expect(made.taps.length).toBeLessThanOrEqual(taps("equiripple", tighter));
        expect(made.why).toContain(`${made.taps.length} taps keep`);
      }
  });

  it("takes a windowed sinc where equiripple would be too long", () => {
    const mask: Mask = {
      shape: "low-pass",
      pass: [0.01],
      stop: [0.011],
      ripple_dB: 0.05,
      attenuation_dB: 60,
    };
    const made = designBySpecification({ ...mask, method: "auto", parity: "odd" });
    expect(made.method).toBe("windowed-sinc");
    expect(made.why).toMatch(/no equiripple filter of up to 2001 taps/);
    expect(() => designBySpecification({ ...mask, method: "equiripple" })).toThrow(/no equiripple filter/);
    expect(() => designBySpecification({ ...mask, method: "least-squares" })).toThrow(
      /no least-squares filter/,
    );
  });
});

describe("by specification: a steady level stays that level", () => {
  it("with auto, whatever it chooses: gain exactly 1 at zero, at Nyquist, or at the band's centre", () => {
    for (const [shape, pass, stop, at] of [
      ["low-pass", [0.05], [0.09], 0],
      ["low-pass", [0.2], [0.24], 0],
      ["band-stop", [0.1, 0.3], [0.15, 0.25], 0],
      ["high-pass", [0.2], [0.15], 0.5],
      ["band-pass", [0.15, 0.25], [0.1, 0.3], 0.2],
    ] as const) {
      const mask = { shape, pass, stop, ripple_dB: 0.5, attenuation_dB: 50 };
      const made = designBySpecification({ ...mask, method: "auto", parity: "odd" });
      expect(Math.abs(gainAt(made.taps, at) - 1), made.why).toBeLessThan(1e-12);
      expect(made.achieved.ripple_dB).toBeLessThanOrEqual(0.5);
      expect(made.achieved.attenuation_dB).toBeGreaterThanOrEqual(50);
    }
  });
});
