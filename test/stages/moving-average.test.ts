import { describe, expect, it } from "vitest";
import { stageDesignAccount } from "../../src/report/stage-account.ts";
import { intervalSeconds, timeOf } from "../../src/signal/grid.ts";
import { amplitudeAt } from "../../src/signal/linear-phase.ts";
import { END, FILLED, MISSING, stateOf, THIN } from "../../src/signal/marks.ts";
import { type Entry, evenRows, planOf, run } from "../engine/harness.ts";
import averages from "../reference/08-published-weighted-averages.json" with { type: "json" };
import responses from "../reference/10-moving-average-response.json" with { type: "json" };
import edges from "../reference/11-centred-filtering-edges.json" with { type: "json" };
import { BRIDGED, clean, largest, present, SECONDS } from "./parts/small.ts";

const mean = (settings: Record<string, unknown>): Entry => ({ stage: "moving-average", ...settings });
const account = (settings: Record<string, unknown>) => {
  const plan = planOf([SECONDS, mean(settings)]);
  return { ...stageDesignAccount(plan, plan.stages[0]!), plan, taps: plan.stages[0]!.design.taps! };
};
const NO = Number.NaN;

describe("published weighted averages (reference 08)", () => {
  it.each(averages.cases)("$id: weights given as a list", ({ inputs, expected }) => {
    const weights = expected.weightsFloat;
    const got = clean([SECONDS, mean({ weights })], inputs.x);
    const { firstIndex, y } = expected.outputFullWindowOnly;
    expect(present(got).map(([t]) => t)).toEqual(y.map((_, i) => firstIndex + i));
    for (const [i, [, v]] of present(got).entries())
      expect(Math.abs(v - y[i]!)).toBeLessThanOrEqual(1e-13 * largest(inputs.x));
    const { taps, enbw_Hz } = account({ weights });
    expected.amplitudeAt.cyclesPerSample.forEach((f, i) => {
      expect(Math.abs(amplitudeAt(taps, f) - expected.amplitudeAt.value[i]!)).toBeLessThan(1e-12);
    });
    // White noise keeps the share sum w^2 of its variance, which is twice the noise bandwidth where the peak is 1.
    if (expected.amplitudeAt.value.every((a) => Math.abs(a) <= 1 + 1e-12))
      expect(2 * enbw_Hz!).toBeCloseTo(expected.sumSquares, 6);
  });
});

describe("response of equal averages (reference 10)", () => {
  it.each(responses.cases.filter((c) => c.inputs.cyclesPerSample !== undefined))("$id", (c) => {
    const { N, cyclesPerSample } = c.inputs;
    const { taps } = account({ points: N });
    expect(Math.abs(amplitudeAt(taps, cyclesPerSample!) - c.expected.amplitude!)).toBeLessThan(1e-12);
  });

  it.each(responses.cases.filter((c) => c.expected.delaySamples !== undefined))("$id", (c) => {
    const { N } = c.inputs;
    const { expected } = c;
    const centred = account({ points: N });
    const past = account({ points: N, reach: "past-only" });
    expect(centred.delay.samples).toBe(expected.delaySamples);
    expect(centred.delay.residual_s).toBe(0);
    expect(past.delay.residual_s).toBe(expected.delaySamples);
    const f3 = centred.gain!.f_3dB_Hz as number;
    expect(Math.abs(f3 / expected.minus3dBCyclesPerSample! - 1)).toBeLessThan(1e-9);
    for (const f of expected.nulls!) expect(Math.abs(amplitudeAt(centred.taps, f))).toBeLessThan(1e-12);
    const half = Math.abs(amplitudeAt(centred.taps, expected.halfPowerCyclesPerSample!));
    expect(Math.abs(half ** 2 - 0.5)).toBeLessThan(1e-9);
    expect(2 * centred.enbw_Hz!).toBeCloseTo(expected.whiteNoiseVarianceRatio!, 6);
    expect(centred.rise_s).toBeCloseTo(N === 2 ? centred.rise_s! : 0.8 * N, 9);
  });

  it("four points: 0.9393 at 0.05 and 0.1488 at 0.45 cycles/sample, turned over, 1.5 samples late", () => {
    const { taps, delay } = account({ points: 4 });
    expect(amplitudeAt(taps, 0.05).toFixed(4)).toBe("0.9393");
    expect(amplitudeAt(taps, 0.45).toFixed(4)).toBe("-0.1488");
    expect(delay.introduced_s).toBe(1.5);
  });
});

describe("windows at the ends (reference 11)", () => {
  const rounding = (x: readonly number[]) => 1e-12 * largest(x);
  const cases = (ending: string) => edges.cases.filter((c) => c.id.endsWith(ending));
  const compare = (got: readonly number[], wanted: readonly number[], limit: number) => {
    expect(got.length).toBe(wanted.length);
    got.forEach((v, i) => expect(Math.abs(v - wanted[i]!)).toBeLessThanOrEqual(limit));
  };
  // Given equal weights go the way of the equal mean, so both are tried.
  const ways = (weights: readonly number[]) =>
    weights.every((w) => w === weights[0]) ? [{ weights }, { points: weights.length }] : [{ weights }];

  it.each(cases("-valid"))("$id: blank", ({ inputs, expected }) => {
    for (const way of ways(inputs.weights!)) {
      const got = present(clean([SECONDS, mean(way)], inputs.x as number[]));
      expect(got[0]![0]).toBe(expected.firstFullIndexCentre);
      compare(
        got.map(([, v]) => v),
        expected.y as number[],
        rounding(inputs.x as number[]),
      );
    }
  });

  it.each(cases("-shrink"))("$id: part of the window", ({ inputs, expected }) => {
    for (const way of ways(inputs.weights!)) {
      const got = clean([SECONDS, mean({ ...way, ends: "part-window" })], inputs.x as number[]);
      compare(got.y, expected.y as number[], rounding(inputs.x as number[]));
      const half = (inputs.weights!.length - 1) / 2;
      expect(got.marks.flatMap((m, i) => (m === END ? [i] : []))).toEqual(
        got.t.filter((t) => t < half || t > inputs.x.length - 1 - half),
      );
    }
  });

  it.each(cases("-causal-zero-start"))("$id: past only, where the window is full", ({ inputs, expected }) => {
    const weights = [...inputs.weights!].reverse();
    const got = present(clean([SECONDS, mean({ weights, reach: "past-only" })], inputs.x as number[]));
    expect(got[0]![0]).toBe(weights.length - 1);
    compare(
      got.map(([, v]) => v),
      (expected.y as number[]).slice(weights.length - 1),
      rounding(inputs.x as number[]),
    );
  });

  it.each(edges.cases.filter((c) => c.id.startsWith("nan-")))("$id: coverage", ({ inputs, expected }) => {
    const x = inputs.x.map((v) => v ?? NO);
    const coverage = `${Math.floor((100 * inputs.minimumValid!) / inputs.window!)} %`;
    const got = clean([SECONDS, mean({ points: inputs.window!, coverage })], x);
    const wanted = (expected.y as (number | null)[]).map((v) => v ?? NO);
    expect(got.y.map(Number.isNaN)).toEqual(wanted.map(Number.isNaN));
    got.y.forEach((v, i) => {
      if (!Number.isNaN(v)) expect(Math.abs(v - wanted[i]!)).toBeLessThan(1e-12);
    });
  });
});

describe("turned", () => {
  /** Twin: the run continued by a half turn about each end point, then full windows only. */
  function twin(run: readonly number[], n: number): number[] {
    const last = run.length - 1;
    const at = (i: number) =>
      i < 0 ? 2 * run[0]! - run[-i]! : i > last ? 2 * run[last]! - run[2 * last - i]! : run[i]!;
    return run.map((_, k) => {
      let sum = 0;
      for (let j = -(n - 1) / 2; j <= (n - 1) / 2; j++) sum += at(k + j);
      return sum / n;
    });
  }

  it("agrees with its twin at both ends of the record and of a gap", () => {
    const x = Array.from({ length: 60 }, (_, i) => Math.sin(i / 5) + 0.02 * i * i);
    x[25] = NO;
    const { y } = clean([SECONDS, mean({ points: 9, ends: "turned" })], x);
    const wanted = [...twin(x.slice(0, 25), 9), NO, ...twin(x.slice(26), 9)];
    y.forEach((v, i) => {
      if (i === 25) expect(v).toBeNaN();
      else expect(Math.abs(v - wanted[i]!)).toBeLessThan(1e-12);
    });
  });

  it("leaves blank where a run is too short to turn", () => {
    const x = [1, 2, 3, 4, NO, 1, 2, NO, 1, 2, 3, 4, 5];
    const { y } = clean([SECONDS, mean({ points: 9, ends: "turned" })], x);
    // Turning about a run's end needs half a window beside it.
    const there = [0, 1, 1, 0, 0, 0, 0, 0, 1, 1, 1, 1, 1];
    expect(y.map((v) => Number(!Number.isNaN(v)))).toEqual(there);
  });

  it("looking at the past only, never looks ahead: blank until half a window is there", () => {
    const x = [5, 7, 9, 11, 13, 15, 17, 19];
    const { y, marks } = clean([SECONDS, mean({ points: 5, ends: "turned", reach: "past-only" })], x);
    // A line stays that line, two samples late.
    expect(y).toEqual([NO, NO, 5, 7, 9, 11, 13, 15]);
    expect(marks).toEqual([MISSING | END, MISSING | END, END, END, 0, 0, 0, 0]);
    const changed = clean(
      [SECONDS, mean({ points: 5, ends: "turned", reach: "past-only" })],
      [...x.slice(0, 7), 99],
    );
    expect(changed.y.slice(0, 7)).toEqual(y.slice(0, 7));
  });
});

describe("moving average", () => {
  it("keeps no error after a huge sample has left the window", () => {
    const x = new Float64Array(400);
    x[100] = 1e15;
    x[101] = 0.1;
    for (const settings of [{ points: 31 }, { points: 30 }, { points: 31, reach: "past-only" }]) {
      const { y, t } = clean([SECONDS, mean(settings)], x);
      y.forEach((v, i) => {
        if (t[i]! < 80 || t[i]! > 140) expect(v === 0 || Number.isNaN(v)).toBe(true);
      });
    }
  });

  it("of even length stands between samples, and says so", () => {
    const { plan, delay, look_ahead_s, end_s, says } = account({ points: 4 });
    const line = clean([SECONDS, mean({ points: 4 })], [0, 1, 2, 3, 4, 5, 6, 7], -3);
    expect(present(line)).toEqual([
      [-1.5, 1.5],
      [-0.5, 2.5],
      [0.5, 3.5],
      [1.5, 4.5],
      [2.5, 5.5],
    ]);
    expect(line.t[0]).toBe(-2.5);
    expect(plan.outGrid.offset).toBe(1);
    expect(delay).toEqual({ samples: 1.5, introduced_s: 1.5, compensated_s: 1.5, residual_s: 0 });
    expect(look_ahead_s).toBe(1.5);
    expect(end_s).toBe(1.5);
    expect(says).toContain("half an interval later");
  });

  it("twice of even length, is back on whole intervals, one later by index and none by time", () => {
    const twice = clean([SECONDS, mean({ points: 2 }), mean({ points: 2 })], [0, 0, 0, 4, 0, 0, 0]);
    expect(present(twice)).toEqual([
      [1, 0],
      [2, 1],
      [3, 2],
      [4, 1],
      [5, 0],
    ]);
    expect(intervalSeconds(twice.plan.outGrid)).toBe(1);
    // What was removed stands beside its input again: kept + removed = input at equal times.
    const x = Array.from({ length: 40 }, (_, i) => Math.sin(i / 3) + (i % 5));
    const {
      clean: kept,
      first,
      removed,
      removedFirst,
    } = run(twice.plan, evenRows(x, 1e6), { removed: true });
    const timeAt = (i: number) => timeOf(twice.plan.outGrid, first + i) / 1e6;
    let compared = 0;
    kept[0]!.forEach((y, i) => {
      const r = removed[0]![timeAt(i) - removedFirst];
      if (Number.isNaN(y) || r === undefined || Number.isNaN(r)) return;
      expect(Math.abs(y + r - x[timeAt(i)]!)).toBeLessThan(1e-14);
      compared++;
    });
    expect(compared).toBe(38);
  });

  it("takes weights in order of time: the last one meets the newest sample", () => {
    const x = [1, 2, 3, 4, 5];
    const last = clean([SECONDS, mean({ weights: [0, 0, 2], reach: "past-only" })], x);
    expect(present(last)).toEqual([
      [2, 3],
      [3, 4],
      [4, 5],
    ]);
    const first = clean([SECONDS, mean({ weights: [2, 0, 0], reach: "past-only" })], x);
    expect(present(first)).toEqual([
      [2, 1],
      [3, 2],
      [4, 3],
    ]);
    expect(account({ weights: [0, 0, 2], reach: "past-only" }).delay.residual_s).toBe(0);
    expect(account({ weights: [2, 0, 0], reach: "past-only" }).delay.residual_s).toBe(2);
    expect(account({ weights: [2, 0, 0] }).delay.residual_s).toBe(1);
    expect(account({ weights: [1, 0, 1], reach: "past-only" }).delay.residual_s).toBe(1);
    expect(account({ weights: [1, 0, 3], reach: "past-only" }).delay.residual_s).toBe(0.5);
  });

  it("counts its length over a rational interval exactly", () => {
    const plan = planOf([{ stage: "resample", rate: "360 Hz" }, mean({ over: "25 ms" })]);
    expect(plan.stages[0]!.design.taps!.length).toBe(9);
    expect(plan.stages[0]!.design.end_s).toBeCloseTo(4 / 360, 15);
    const even = planOf([{ stage: "resample", rate: "360 Hz" }, mean({ points: 2 })]).outGrid;
    expect(timeOf(even, 0)).toBe(1389);
    expect(timeOf(even, -1)).toBe(-1389);
    expect(timeOf(even, 360 * 60)).toBe(60_001_389);
  });

  it("needs exactly the share of samples that coverage says", () => {
    const at = (missing: number, coverage: string) => {
      const x = Array.from({ length: 30 }, (_, i) => (i > 11 && i <= 11 + missing ? NO : 1));
      const { y, marks } = clean([SECONDS, mean({ points: 10, coverage, reach: "past-only" })], x);
      return { y: y[20]!, mark: marks[20]! };
    };
    expect(at(2, "80 %").mark).toBe(THIN);
    expect(at(2, "80 %").y).toBeCloseTo(1, 15);
    expect(at(3, "80 %").y).toBeNaN();
    expect(at(3, "70 %").y).toBeCloseTo(1, 15);
    expect(at(0, "70 %").mark).toBe(0);
    expect(at(1, "100 %").y).toBeNaN();
  });

  it("marks as filled only what rests on the bridged row, at a gap too", () => {
    // Row 4 is bridged; rows 8 and 9 are lost, so the run ends at 7; the window of 9 reaches across.
    const x = Array.from({ length: 24 }, (_, i) => (i === 4 || i === 8 || i === 9 ? undefined : i));
    for (const ends of ["part-window", "turned"]) {
      const { marks, first, y } = clean([BRIDGED, mean({ points: 9, ends })], x);
      const filled = marks.flatMap((m, i) => ((m & FILLED) !== 0 ? [first + i] : []));
      expect(filled).toEqual([0, 1, 2, 3, 4, 5, 6, 7]);
      for (const k of [10, 11, 12]) {
        expect(y[k]).not.toBeNaN();
        expect(stateOf(marks[k]!)).toBe(stateOf(END));
      }
    }
    // The run after the gap begins at 10: the window of 13 around 10 holds row 4, which is not in its run.
    const { marks } = clean([BRIDGED, mean({ points: 13, ends: "part-window" })], x);
    expect(marks[10]).toBe(END);
    // With missing samples left out, it does rest on it.
    const thin = clean([BRIDGED, mean({ points: 13, coverage: "60 %" })], x);
    expect(thin.marks[10]).toBe(THIN | FILLED);
  });
});
