import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { bandLimitedAtIndex, bandLimitedAtTime, SincKernel } from "../../src/signal/band-limited.ts";
import {
  akimaSlopes,
  cubicAt,
  localCubicSlopes,
  monotoneCubicSlopes,
} from "../../src/signal/cubic-interpolation.ts";
import {
  bracketBelow,
  cellMeans,
  nearestSampleAt,
  onLine,
  straightLineAt,
} from "../../src/signal/interpolation.ts";
import reference from "../reference/17-interpolation.json" with { type: "json" };
import { uniform } from "./noise.ts";

const largest = (x: Iterable<number>) => Array.from(x).reduce((m, v) => Math.max(m, Math.abs(v)), 0);

describe("interpolation against reference 17", () => {
  it.each(reference.cases.filter((c) => c.inputs.t !== undefined))("$id", ({ inputs, expected }) => {
    const t = Float64Array.from(inputs.t!);
    const y = Float64Array.from(inputs.y!);
    const limit = 1e-11 * largest(y);
    const monotone = monotoneCubicSlopes(t, y);
    const akima = akimaSlopes(t, y);
    for (const [i, q] of inputs.query!.entries()) {
      expect(Math.abs(straightLineAt(t, y, q) - expected.linear![i]!)).toBeLessThanOrEqual(limit);
      expect(Math.abs(cubicAt(t, y, monotone, q) - expected.pchip![i]!)).toBeLessThanOrEqual(limit);
      expect(Math.abs(cubicAt(t, y, akima, q) - expected.akima![i]!)).toBeLessThanOrEqual(limit);
      expect(nearestSampleAt(t, y, q)).toBe(expected.nearestTiesToEarlier![i]!);
      expect(y[bracketBelow(t, q)]).toBe(expected.previous![i]!);
    }
  });

  it("windowed-sinc-half8-beta6, on indices and on even times", () => {
    const { inputs, expected } = reference.cases.find((c) => c.id === "windowed-sinc-half8-beta6")!;
    const x = Float64Array.from(inputs.xUniform!);
    const t = Float64Array.from(x, (_, i) => i);
    const kernel = new SincKernel(inputs.halfWidth!, inputs.kaiserBeta!);
    for (const [i, q] of inputs.queryIndex!.entries()) {
      const wanted = expected.normalised![i]!;
      expect(Math.abs(bandLimitedAtIndex(x, q, kernel) - wanted)).toBeLessThanOrEqual(1e-11 * largest(x));
      expect(Math.abs(bandLimitedAtTime(t, x, q, 1, kernel) - wanted)).toBeLessThanOrEqual(
        1e-11 * largest(x),
      );
    }
  });
});

const knots = fc
  .array(fc.tuple(fc.integer({ min: 1, max: 1000 }), fc.double({ min: -1e6, max: 1e6, noNaN: true })), {
    minLength: 1,
    maxLength: 20,
  })
  .map((list) => {
    let at = -500;
    const t = Float64Array.from(list, ([step]) => (at += step));
    return { t, y: Float64Array.from(list, ([, v]) => v) };
  });

describe("every method", () => {
  it("goes through its samples exactly and is silent outside them", () => {
    fc.assert(
      fc.property(knots, ({ t, y }) => {
        const slopes = [monotoneCubicSlopes(t, y), localCubicSlopes(t, y), akimaSlopes(t, y)];
        const methods = [
          (q: number) => straightLineAt(t, y, q),
          (q: number) => nearestSampleAt(t, y, q),
          ...slopes.map((s) => (q: number) => cubicAt(t, y, s, q)),
        ];
        for (const method of methods) {
          for (const [k, at] of t.entries()) expect(method(at)).toBe(y[k]);
          expect(method(t[0]! - 1e-3)).toBeNaN();
          expect(method(t.at(-1)! + 1e-3)).toBeNaN();
          expect(method(Number.NaN)).toBeNaN();
        }
      }),
    );
  });

  it("gives a straight line back", () => {
    fc.assert(
      fc.property(knots, fc.integer({ min: -50, max: 50 }), ({ t }, slope) => {
        const y = t.map((v) => 3 + slope * v);
        for (const slopes of [monotoneCubicSlopes(t, y), localCubicSlopes(t, y), akimaSlopes(t, y)])
          for (let k = 0; k + 1 < t.length; k++)
            for (const u of [0.2, 0.5, 0.9]) {
              const q = t[k]! + u * (t[k + 1]! - t[k]!);
              expect(Math.abs(cubicAt(t, y, slopes, q) - (3 + slope * q))).toBeLessThanOrEqual(1e-9);
            }
      }),
    );
  });
});

describe("monotone cubic", () => {
  it("stays between the two samples around it", () => {
    fc.assert(
      fc.property(knots, ({ t, y }) => {
        const slopes = monotoneCubicSlopes(t, y);
        const slack = 1e-12 * largest(y);
        for (let k = 0; k + 1 < t.length; k++)
          for (let j = 1; j < 16; j++) {
            const v = cubicAt(t, y, slopes, t[k]! + ((t[k + 1]! - t[k]!) * j) / 16);
            expect(v).toBeGreaterThanOrEqual(Math.min(y[k]!, y[k + 1]!) - slack);
            expect(v).toBeLessThanOrEqual(Math.max(y[k]!, y[k + 1]!) + slack);
          }
      }),
    );
  });
});

describe("local cubic", () => {
  it("gives a parabola back on uneven samples, its end pieces too", () => {
    const t = Float64Array.of(0, 1, 2.5, 3, 4.2, 6, 7);
    const f = (v: number) => 2 - 3 * v + 0.5 * v * v;
    const y = t.map(f);
    const slopes = localCubicSlopes(t, y);
    for (let q = 0; q <= 7; q += 0.05) expect(cubicAt(t, y, slopes, q)).toBeCloseTo(f(q), 11);
  });
  it("on even samples has the weights of Catmull & Rom: -1/16, 9/16, 9/16, -1/16 half-way", () => {
    const t = Float64Array.of(0, 1, 2, 3);
    for (const [k, w] of [-1 / 16, 9 / 16, 9 / 16, -1 / 16].entries()) {
      const y = new Float64Array(4);
      y[k] = 1;
      expect(cubicAt(t, y, localCubicSlopes(t, y), 1.5)).toBeCloseTo(w, 15);
    }
  });
});

describe("straight line", () => {
  it("meets both ends whatever the sizes", () => {
    expect(onLine(0, 1e16, 1, 1, 1)).toBe(1);
    expect(onLine(0, 1e16, 1, 1, 0)).toBe(1e16);
  });
});

describe("cell means", () => {
  const t = Float64Array.of(0, 1, 2.5, 3, 4.2, 6, 7);
  const y = Float64Array.of(1, 3, 2, 2, 5, 4, 4.5);
  it("are the integral of the straight lines, cell by cell", () => {
    // By hand: over 0 to 1 the mean of a line from 1 to 3; over 1 to 3, 1.5 * 2.5 + 0.5 * 2 over 2.
    const means = cellMeans(t, y, Float64Array.of(0, 1, 3));
    expect(means[0]).toBeCloseTo(2, 14);
    expect(means[1]).toBeCloseTo((1.5 * 2.5 + 0.5 * 2) / 2, 14);
    // A cell inside one piece is its middle value.
    expect(cellMeans(t, y, Float64Array.of(3.1, 3.5))[0]).toBeCloseTo(2 + (3 * 0.3) / 1.2, 13);
  });
  it("agree with fine sums and add up", () => {
    const edges = Float64Array.of(0.3, 0.9, 1.7, 1.75, 4, 6.9);
    const means = cellMeans(t, y, edges);
    let total = 0;
    for (let c = 0; c < means.length; c++) {
      const n = 20000;
      const width = edges[c + 1]! - edges[c]!;
      let fine = 0;
      for (let i = 0; i < n; i++) fine += straightLineAt(t, y, edges[c]! + ((i + 0.5) * width) / n) / n;
      expect(means[c]).toBeCloseTo(fine, 7);
      total += means[c]! * width;
    }
    expect(total).toBeCloseTo(cellMeans(t, y, Float64Array.of(0.3, 6.9))[0]! * 6.6, 12);
  });
  it("keep a constant as it is and are NaN where the samples do not reach", () => {
    const flat = new Float64Array(7).fill(0.1);
    expect(Array.from(cellMeans(t, flat, Float64Array.of(0, 0.7, 3.3, 7)))).toEqual([0.1, 0.1, 0.1]);
    expect(Array.from(cellMeans(t, flat, Float64Array.of(-1, 0.5, 1, 7.5)))).toEqual([
      Number.NaN,
      0.1,
      Number.NaN,
    ]);
    expect(cellMeans(t, flat, new Float64Array(0)).length).toBe(0);
  });
  it("of a tone on dense samples shrink by sin(x) / x", () => {
    const dense = Float64Array.from({ length: 20001 }, (_, i) => i / 1000);
    const f = 0.31;
    const tone = dense.map((v) => Math.cos(2 * Math.PI * f * v));
    const edges = Float64Array.from({ length: 20 }, (_, i) => i + 0.25);
    const x = Math.PI * f;
    for (const [c, mean] of cellMeans(dense, tone, edges).entries())
      expect(mean).toBeCloseTo((Math.sin(x) / x) * Math.cos(2 * Math.PI * f * (edges[c]! + 0.5)), 5);
  });
});

describe("band-limited interpolation", () => {
  const kernel = new SincKernel(16, 8);
  it("restores tones up to 0.35 cycles/sample", () => {
    const x = Float64Array.from({ length: 100 }, (_, i) => Math.cos(2 * Math.PI * 0.35 * i + 1));
    for (let q = 20; q < 80; q += 0.37)
      expect(Math.abs(bandLimitedAtIndex(x, q, kernel) - Math.cos(2 * Math.PI * 0.35 * q + 1))).toBeLessThan(
        1e-3,
      );
  });

  it("takes most of a jittered clock's error away, and is exact at the samples", () => {
    const jitter = uniform(42, 200);
    const worst = (f: number, size: number) => {
      const tone = (at: number) => Math.cos(2 * Math.PI * f * at + 1);
      const t = Float64Array.from(jitter, (u, i) => i + size * (u - 0.5));
      const y = t.map(tone);
      let error = 0;
      let unmoved = 0;
      for (let q = 20.3; q < 180; q += 0.37) {
        error = Math.max(error, Math.abs(bandLimitedAtTime(t, y, q, 1, kernel) - tone(q)));
        const k = bracketBelow(t, q);
        const index = k + (q - t[k]!) / (t[k + 1]! - t[k]!);
        unmoved = Math.max(unmoved, Math.abs(bandLimitedAtIndex(y, index, kernel) - tone(q)));
      }
      expect(bandLimitedAtTime(t, y, t[50]!, 1, kernel)).toBe(y[50]);
      return { error, unmoved };
    };
    expect(worst(0.15, 0).error).toBeLessThan(1e-4);
    for (const f of [0.05, 0.15, 0.3]) {
      const { error, unmoved } = worst(f, 0.02);
      const share = 1 - Math.sin(2 * Math.PI * f) / (2 * Math.PI * f);
      expect(error).toBeLessThan(1.2 * share * unmoved + 1e-4);
    }
  });

  it("keeps a constant exactly enough, and is silent at the ends and on uneven clocks", () => {
    const t = Float64Array.from({ length: 60 }, (_, i) => i);
    const flat = new Float64Array(60).fill(7);
    expect(bandLimitedAtIndex(flat, 30.3, kernel)).toBeCloseTo(7, 13);
    expect(bandLimitedAtTime(t, flat, 30.3, 1, kernel)).toBeCloseTo(7, 13);
    expect(bandLimitedAtIndex(flat, 14.5, kernel)).toBeNaN();
    expect(bandLimitedAtIndex(flat, 43.5, kernel)).not.toBeNaN();
    expect(bandLimitedAtIndex(flat, 44.5, kernel)).toBeNaN();
    expect(bandLimitedAtTime(t, flat, 15.5, 1, kernel)).toBeNaN();
    const holed = t.map((v) => (v > 35 ? v + 3 : v));
    expect(bandLimitedAtTime(holed, flat, 30.3, 1, kernel)).toBeNaN();
    expect(() => new SincKernel(0, 6)).toThrow(RangeError);
    expect(() => new SincKernel(8, -1)).toThrow(RangeError);
  });
});
