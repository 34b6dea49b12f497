import { describe, expect, it } from "vitest";
import { DesignError } from "../../src/signal/design-error.ts";
import { keeps, type Mask } from "../../src/signal/mask.ts";
import { symmetryOf } from "../../src/signal/response.ts";
import { achievedBy, designBySpecification } from "../../src/signal/specification.ts";
import { designWindowedSinc } from "../../src/signal/windowed-sinc.ts";
import { onDenseGrid, randomMask, shapes } from "./masks.ts";

describe("by specification: windowed sinc", () => {
  it.each(shapes)("%s: keeps the mask, and no Kaiser window two taps shorter does", (shape) => {
    for (let i = 0; i < 12; i++) {
      const mask = randomMask(shape, 1000 + i);
      const made = designBySpecification({ ...mask, method: "windowed-sinc" });
      expect(symmetryOf(made.taps)).toBe("even");
      const seen = onDenseGrid(made.taps, mask);
      expect(seen.ripple_dB).toBeLessThanOrEqual(mask.ripple_dB);
      expect(seen.attenuation_dB).toBeGreaterThanOrEqual(mask.attenuation_dB);
      // What is said to be achieved is what is seen, up to what lies between the points of the grid.
      expect(made.achieved.ripple_dB).toBeGreaterThanOrEqual(seen.ripple_dB - 1e-9);
      expect(made.achieved.ripple_dB).toBeLessThanOrEqual(mask.ripple_dB);
      expect(made.achieved.attenuation_dB).toBeLessThanOrEqual(seen.attenuation_dB + 1e-9);
      const edges = mask.pass.map((p, k) => (p + mask.stop[k]!) / 2);
      const n = made.taps.length - 2;
      for (let beta = Math.max(0, made.beta! - 2); n > 2 && beta < made.beta! + 2; beta += 0.05) {
        const shorter = designWindowedSinc({ taps: n, shape, edges, window: "kaiser", beta });
        expect(keeps(achievedBy(shorter, mask), mask), `${n} taps, beta ${beta}`).toBe(false);
      }
    }
  });

  it("odd lengths when asked", () => {
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
