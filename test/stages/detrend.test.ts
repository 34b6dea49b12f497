import { describe, expect, it } from "vitest";
import { intervalSeconds, timeOf } from "../../src/signal/grid.ts";
import { FILLED, MISSING } from "../../src/signal/marks.ts";
import type { LearnedTrend } from "../../src/signal/trend-kernel.ts";
import { type Entry, planOf, run } from "../engine/harness.ts";
import reference from "../reference/12-polynomial-detrend.json" with { type: "json" };
import { BRIDGED, clean, largest, SECONDS } from "./parts/small.ts";

const detrend = (settings: Record<string, unknown> = {}): Entry => ({ stage: "detrend", ...settings });
const NO = Number.NaN;

interface Told {
  readonly coefficient_units: readonly string[];
  readonly spans_without_trend: number;
  readonly trends: readonly {
    readonly origin_us: number;
    readonly first_us: number;
    readonly last_us: number;
    readonly samples: number;
    readonly coefficients: readonly number[];
  }[];
}

/** A run of one detrend stage, with what the account will tell of it. */
function detrended(
  settings: Record<string, unknown>,
  x: readonly (number | undefined)[],
  from_s = 0,
  grid = SECONDS,
) {
  const plan = planOf([grid, detrend(settings)]);
  const { stride, halfNum, halfDen } = plan.outGrid;
  const step_us = (stride * halfNum) / halfDen;
  const kept = x.flatMap((v, i) => (v === undefined ? [] : [[from_s * 1e6 + i * step_us, v] as const]));
  const record = { times: kept.map(([t]) => t), columns: [kept.map(([, v]) => v)] };
  const { results, clean: series, marks, first } = run(plan, record);
  const told = plan.stages[0]!.design.learnedNotes!(results[0]!.learned.get(0), "m") as Told;
  return {
    plan,
    y: series[0]!,
    marks: marks[0]!,
    first,
    told,
    learned: results[0]!.learned.get(0) as LearnedTrend,
  };
}

describe("against reference 12", () => {
  const even = (x: readonly number[]) => x.every((v, i) => v === x[0]! + i);
  const residuals = reference.cases.filter(
    (c) => c.expected.exactResiduals !== undefined && c.inputs.degree! <= 5 && even(c.inputs.x!),
  );

  it("has certified cases on even times", () => expect(residuals.length).toBeGreaterThanOrEqual(2));

  it.each(residuals)("$id: residuals", ({ inputs, expected }) => {
    const { y } = detrended({ degree: inputs.degree! }, inputs.y!, inputs.x![0]!);
    const limit = 1e-11 * largest(inputs.y!);
    y.forEach((v, i) => expect(Math.abs(v - expected.exactResiduals![i]!)).toBeLessThanOrEqual(limit));
  });

  it("epoch-seconds-cubic: minutes of 2023, at their own times", () => {
    const { inputs, expected } = reference.cases.find((c) => c.id === "epoch-seconds-cubic")!;
    const grid = { stage: "resample", interval: "1 min" };
    const { y, first, plan } = detrended({ degree: 3 }, inputs.y!, inputs.x![0]!, grid);
    // 1700000000 is 20 s past a minute, so the grid of this chain is anchored there.
    expect(timeOf(plan.outGrid, first)).toBe(1_700_000_040e6);
    const anchored = { ...grid, anchor: "2023-11-14T22:13:20Z" };
    const own = detrended({ degree: 3 }, inputs.y!, inputs.x![0]!, anchored);
    expect(own.y.length).toBe(30);
    own.y.forEach((v, i) =>
      expect(Math.abs(v - expected.exactResiduals![i]!)).toBeLessThanOrEqual(1e-10 * largest(inputs.y!)),
    );
    expect(y.length).toBe(29);
  });

  it.each([
    ["scipy-detrend-constant", 0],
    ["scipy-detrend-linear", 1],
  ])("%s", (id, degree) => {
    const { inputs, expected } = reference.cases.find((c) => c.id === id)!;
    const { y } = detrended({ degree }, inputs.x!);
    y.forEach((v, i) => expect(Math.abs(v - (expected.y as number[])[i]!)).toBeLessThanOrEqual(1e-11));
  });

  it("NumAcc: the mean is taken out to the last digit", () => {
    const { inputs } = reference.cases.find((c) => c.id === "NumAcc1")!;
    expect(detrended({ degree: 0 }, inputs.y!).y).toEqual([-1, 1, 0]);
    const x = Array.from({ length: 1001 }, (_, i) =>
      i === 0 ? 1000000.2 : i % 2 === 1 ? 1000000.1 : 1000000.3,
    );
    const { y, told } = detrended({ degree: 0 }, x);
    expect(told.trends[0]!.coefficients[0]!).toBeCloseTo(1000000.2, 9);
    y.forEach((v, i) => expect(v).toBeCloseTo(i === 0 ? 0 : i % 2 === 1 ? -0.1 : 0.1, 9));
  });
});

describe("what the account tells", () => {
  it("trend from its coefficients in seconds, plus what is left, gives the input back", () => {
    for (const grid of [
      SECONDS,
      { stage: "resample", rate: "8 Hz" },
      { stage: "resample", interval: "1 min" },
    ])
      for (const settings of [{ degree: 2 }, { degree: 3, over: "10 min" }]) {
        const x = Array.from({ length: 900 }, (_, i) => 4 + Math.sin(i / 40) - 0.003 * i + 1e-6 * i * i);
        const { y, plan, first, told } = detrended(settings, x, -300, grid);
        let told_of = 0;
        y.forEach((v, i) => {
          const t = timeOf(plan.outGrid, first + i);
          const trend = told.trends.find(({ first_us, last_us }) => t >= first_us && t <= last_us);
          if (trend === undefined) return;
          const s = (t - trend.origin_us) / 1e6;
          const value = trend.coefficients.reduceRight((sum, a) => sum * s + a, 0);
          expect(Math.abs(value + v - x[i]!)).toBeLessThan(1e-10);
          told_of++;
        });
        expect(told_of).toBe(900);
        expect(told.coefficient_units.slice(0, 3)).toEqual(["m", "m/s", "m/s2"]);
      }
  });

  it("a line's slope is per second, at any rate", () => {
    for (const [grid, step] of [
      [SECONDS, 1],
      [{ stage: "resample", interval: "10 ms" }, 0.01],
      [{ stage: "resample", interval: "1 min" }, 60],
    ] as const) {
      const x = Array.from({ length: 100 }, (_, i) => 2 - 0.25 * i * step);
      const { told } = detrended({ degree: 1 }, x, 0, grid as Entry);
      expect(told.trends[0]!.coefficients[0]!).toBeCloseTo(2, 9);
      expect(told.trends[0]!.coefficients[1]!).toBeCloseTo(-0.25, 9);
      expect(told.trends[0]!.samples).toBe(100);
    }
  });
});

describe("spans", () => {
  it("are anchored to the grid: before 1970 as after, whatever the record's start", () => {
    const x = Array.from({ length: 130 }, (_, i) => (i - 65) ** 2);
    const { told, y, first } = detrended({ degree: 0, over: "50 s" }, x, -65);
    expect(told.trends.map((t) => [t.first_us / 1e6, t.last_us / 1e6])).toEqual([
      [-65, -51],
      [-50, -1],
      [0, 49],
      [50, 64],
    ]);
    expect(first).toBe(-65);
    // Each span's own mean is gone.
    for (const [from, to] of [
      [0, 15],
      [15, 65],
      [65, 115],
      [115, 130],
    ] as const) {
      const sum = y.slice(from, to).reduce((a, b) => a + b, 0);
      expect(Math.abs(sum)).toBeLessThan(1e-9);
    }
  });

  it("with too few samples for their trend are blank and counted, and their neighbours are not", () => {
    const x = Array.from({ length: 30 }, (_, i) => (i >= 12 && i < 20 ? NO : i));
    const { y, marks, told } = detrended({ degree: 1, over: "10 s" }, x);
    expect(told.spans_without_trend).toBe(1);
    expect(told.trends.length).toBe(2);
    y.forEach((v, i) => {
      const blank = i >= 10 && i < 20;
      expect(Number.isNaN(v)).toBe(blank);
      expect((marks[i]! & MISSING) !== 0).toBe(blank);
    });
    // Three samples are enough for a line.
    const three = Array.from({ length: 30 }, (_, i) => (i >= 13 && i < 20 ? NO : i % 4));
    expect(detrended({ degree: 1, over: "10 s" }, three).told.spans_without_trend).toBe(0);
  });

  it("go by the samples of the grid at hand, after decimation too", () => {
    const chain = [
      SECONDS,
      { stage: "decimate", by: 5, "anti-alias": "upstream", "accept-aliasing": true },
      detrend({ degree: 0, over: "20 s" }),
    ];
    const x = Array.from({ length: 60 }, (_, i) => i);
    const { y, t, plan } = clean(chain, x, -20);
    expect(intervalSeconds(plan.outGrid)).toBe(5);
    expect(t[0]).toBe(-20);
    expect(y).toEqual([-7.5, -2.5, 2.5, 7.5, -7.5, -2.5, 2.5, 7.5, -7.5, -2.5, 2.5, 7.5]);
  });

  it("reach over their whole length, the whole record over all", () => {
    const over = planOf([SECONDS, detrend({ over: "50 s" })]).stages[0]!.design;
    expect(over.reach).toEqual({ before: 49, after: 49 });
    expect(planOf([SECONDS, detrend()]).stages[0]!.design.reach).toBeNull();
  });
});

describe("missing samples", () => {
  it("do not bend the trend, and stay missing; marks are handed on", () => {
    const line = Array.from({ length: 60 }, (_, i) => 3 + 2 * i);
    const holed = line.map((v, i) => (i > 20 && i < 40 ? NO : v));
    const { y } = detrended({ degree: 1 }, holed);
    y.forEach((v, i) => {
      if (i > 20 && i < 40) expect(v).toBeNaN();
      else expect(Math.abs(v)).toBeLessThan(1e-12);
    });
    const bridged = clean([BRIDGED, detrend()], [...line.slice(0, 30), undefined, ...line.slice(31)]);
    expect(bridged.marks.flatMap((m, i) => (m === FILLED ? [i] : []))).toEqual([30]);
  });

  it("a record of nothing gives nothing", () => {
    const { y, told } = detrended({ degree: 2 }, [NO, NO, NO, NO]);
    expect(y.every(Number.isNaN)).toBe(true);
    expect(told.trends).toEqual([]);
  });
});
