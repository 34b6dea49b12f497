import fc from "fast-check";
import { describe, expect, it } from "vitest";
import {
  HAMPEL_SCALE,
  type HampelSettings,
  hampelByCount,
  hampelByTime,
  median,
  medianAbsoluteDeviation,
} from "../../src/signal/robust.ts";
import { SortedWindow } from "../../src/signal/sorted-window.ts";
import reference from "../reference/19-mad-hampel.json" with { type: "json" };
import { nearGaussian, uniform } from "./noise.ts";

function naiveMedian(list: number[]): number {
  const sorted = list.filter((v) => !Number.isNaN(v)).sort((a, b) => a - b);
  const half = sorted.length >> 1;
  if (sorted.length === 0) return Number.NaN;
  return sorted.length % 2 === 1 ? sorted[half]! : (sorted[half - 1]! + sorted[half]!) / 2;
}
const naiveDeviation = (list: number[]) => {
  const centre = naiveMedian(list);
  return naiveMedian(list.map((v) => Math.abs(v - centre)));
};

/** Times on which the definition by time is tried against the definition by count. */
const even = (n: number) => Float64Array.from({ length: n }, (_, i) => 10 * i);

describe("against reference 19", () => {
  it.each(reference.cases.filter((c) => c.inputs.halfWidth !== undefined))("$id", ({ inputs, expected }) => {
    const x = Float64Array.from(inputs.x);
    expect(inputs.scale).toBe(HAMPEL_SCALE);
    const settings: HampelSettings = {
      deviations: inputs.threshold!,
      ends: inputs.edge === "skip" ? "blank" : "part-window",
    };
    for (const figures of [
      hampelByCount(x, inputs.halfWidth!, settings),
      hampelByTime(even(x.length), x, 10 * inputs.halfWidth!, settings),
    ]) {
      const flagged = Array.from(x.keys()).filter((i) => figures.outliers[i] === 1);
      expect(flagged).toEqual(expected.outlierIndices0);
      for (const [i, wanted] of expected.medians!.entries()) {
        if (wanted === null) {
          expect(figures.medians[i]).toBeNaN();
          expect(figures.scales[i]).toBeNaN();
        } else {
          expect(Math.abs(figures.medians[i]! - wanted)).toBeLessThanOrEqual(1e-12);
          expect(Math.abs(figures.scales[i]! - expected.scaledMad![i]!)).toBeLessThanOrEqual(1e-12);
        }
        const replaced = figures.outliers[i] === 1 ? figures.medians[i]! : x[i]!;
        expect(Math.abs(replaced - expected.replaced![i]!)).toBeLessThanOrEqual(1e-12);
      }
    }
  });

  it.each(reference.cases.filter((c) => c.inputs.halfWidth === undefined))("$id", ({ inputs, expected }) => {
    const centre = median(inputs.x);
    const deviation = medianAbsoluteDeviation(inputs.x);
    expect(centre).toBeCloseTo(expected.median!, 12);
    expect(deviation).toBeCloseTo(expected.rawMad!, 12);
    expect(HAMPEL_SCALE * deviation).toBeCloseTo(expected.madTimes1p4826!, 12);
    for (const [i, wanted] of expected.modifiedZ!.entries())
      if (wanted === null) expect(deviation).toBe(0);
      else expect((0.6745 * (inputs.x[i]! - centre)) / deviation).toBeCloseTo(wanted, 11);
  });
});

// Few distinct values, so that ties are common, and NaN, zeros of both signs and infinities among them.
const value = fc.oneof(
  fc.integer({ min: -4, max: 4 }),
  fc.double({ min: -1e6, max: 1e6, noNaN: true }),
  fc.constantFrom(Number.NaN, -0, 1e300, -1e300),
);

describe("median and median absolute deviation", () => {
  it("equal sorting", () => {
    fc.assert(
      fc.property(fc.array(value, { maxLength: 60 }), (list) => {
        const before = [...list];
        expect(median(list) + 0).toEqual(naiveMedian(list) + 0);
        expect(medianAbsoluteDeviation(list) + 0).toEqual(naiveDeviation(list) + 0);
        expect(list).toEqual(before);
      }),
      { numRuns: 500 },
    );
  });
  it("take a million values in any order without going quadratic", () => {
    const n = 1_000_001;
    const rising = Float64Array.from({ length: n }, (_, i) => i);
    const orders = [
      rising,
      rising.map((v) => n - 1 - v),
      rising.map((v) => Math.min(v, n - 1 - v) + (v > n / 2 ? n / 2 : 0)),
      rising.map((v) => v % 2),
      new Float64Array(n).fill(3),
      uniform(7, n),
    ];
    const start = performance.now();
    const got = orders.map(median);
    expect(performance.now() - start).toBeLessThan(5000);
    expect(got[0]).toBe(500_000);
    expect(got[1]).toBe(500_000);
    expect(got[3]).toBe(0);
    expect(got[4]).toBe(3);
  });
  it("estimate the standard deviation of Gaussian noise with the scale", () => {
    expect(Math.abs(HAMPEL_SCALE * medianAbsoluteDeviation(nearGaussian(42, 40_000)) - 1)).toBeLessThan(0.02);
  });
});

describe("sorted window", () => {
  it("holds what a sorted list would hold, through growth, splits and emptying", () => {
    const window = new SortedWindow();
    const twin: number[] = [];
    const u = uniform(99, 12_000);
    const v = uniform(5, 12_000);
    for (let i = 0; i < 12_000; i++) {
      // Grows to about 3,000, then shrinks to nothing; one value in three is a repeated one.
      const grow = i < 6000 ? u[i]! < 0.75 : u[i]! < 0.25;
      if (grow) {
        const x = i % 3 === 0 ? Math.round(20 * v[i]!) / 20 : v[i]!;
        window.add(x);
        twin.push(x);
      } else if (twin.length > 0) {
        const [x] = twin.splice(Math.floor(v[i]! * twin.length), 1);
        window.remove(x!);
      }
      expect(window.size).toBe(twin.length);
      if (i % 97 === 0) {
        const sorted = [...twin].sort((a, b) => a - b);
        expect(sorted.map((_, k) => window.at(k))).toEqual(sorted);
        expect(window.median()).toEqual(naiveMedian(twin));
        expect(window.medianAbsoluteDeviation()).toEqual(naiveDeviation(twin));
      }
    }
    while (twin.length > 0) window.remove(twin.pop()!);
    expect(window.median()).toBeNaN();
    expect(window.medianAbsoluteDeviation()).toBeNaN();
    window.add(-0);
    window.remove(0);
    expect(() => window.remove(1)).toThrow(RangeError);
  });
});

describe("Hampel identifier", () => {
  it("equals its definition on any record and window", () => {
    fc.assert(
      fc.property(
        fc.array(value, { minLength: 1, maxLength: 40 }),
        fc.integer({ min: 1, max: 9 }),
        fc.constantFrom("blank" as const, "part-window" as const),
        fc.constantFrom(0, 0.5),
        (list, half, ends, floor) => {
          const x = Float64Array.from(list);
          const settings = { deviations: 3, ends, floor };
          const figures = hampelByCount(x, half, settings);
          for (let i = 0; i < x.length; i++) {
            const judged =
              !Number.isNaN(x[i]!) && (ends === "part-window" || (i >= half && i + half < x.length));
            const window = Array.from(x.slice(Math.max(0, i - half), i + half + 1));
            const centre = judged ? naiveMedian(window) : Number.NaN;
            const scale = judged ? HAMPEL_SCALE * naiveDeviation(window) : Number.NaN;
            expect(figures.medians[i]! + 0).toEqual(centre + 0);
            expect(figures.scales[i]).toEqual(scale);
            expect(figures.outliers[i]).toBe(Math.abs(x[i]! - centre) > 3 * Math.max(scale, floor) ? 1 : 0);
          }
          expect(hampelByTime(even(x.length), x, 10 * half, settings)).toEqual(figures);
        },
      ),
      { numRuns: 300 },
    );
  });

  it("by time takes what is near in time, not in count", () => {
    const t = Float64Array.of(0, 1, 2, 3, 100, 101, 102, 103, 104);
    const x = Float64Array.of(5, 5.1, 4.9, 5, 50, 50.1, 70, 49.9, 50.2);
    const { outliers, medians } = hampelByTime(t, x, 4, { deviations: 3, ends: "part-window" });
    expect(Array.from(outliers)).toEqual([0, 0, 0, 0, 0, 0, 1, 0, 0]);
    expect(medians[3]).toBe(5);
    expect(medians[4]).toBe(50.1);
    const blank = hampelByTime(t, x, 2, { deviations: 3, ends: "blank" });
    expect(Array.from(blank.medians, Number.isNaN)).toEqual([
      true,
      true,
      ...new Array(5).fill(false),
      true,
      true,
    ]);
  });

  it("with a floor leaves the last digit of a constant reading alone", () => {
    const x = Float64Array.of(5, 5, 5, 5.01, 5, 5, 5, 9, 5, 5, 5);
    const flags = (floor: number) =>
      Array.from(hampelByCount(x, 3, { deviations: 3, floor, ends: "part-window" }).outliers);
    expect(flags(0)).toEqual([0, 0, 0, 1, 0, 0, 0, 1, 0, 0, 0]);
    expect(flags(0.005)).toEqual([0, 0, 0, 0, 0, 0, 0, 1, 0, 0, 0]);
  });

  it("takes a window of twenty thousand samples in one sweep", () => {
    const x = nearGaussian(1, 60_000);
    x[30_000] = 40;
    const start = performance.now();
    const { outliers } = hampelByCount(x, 10_000, { deviations: 10, ends: "part-window" });
    expect(performance.now() - start).toBeLessThan(8000);
    expect(outliers.reduce((s, v) => s + v, 0)).toBe(1);
    expect(outliers[30_000]).toBe(1);
  });

  it("refuses settings without a meaning", () => {
    const x = new Float64Array(9);
    const good: HampelSettings = { deviations: 3, ends: "blank" };
    expect(() => hampelByCount(x, 0, good)).toThrow(RangeError);
    expect(() => hampelByCount(x, 1.5, good)).toThrow(RangeError);
    expect(() => hampelByTime(x, x, 0, good)).toThrow(RangeError);
    expect(() => hampelByCount(x, 1, { ...good, deviations: 0 })).toThrow(RangeError);
    expect(() => hampelByCount(x, 1, { ...good, floor: -1 })).toThrow(RangeError);
  });
});
