import { describe, expect, it } from "vitest";
import { stageDesignAccount } from "../../src/report/stage-account.ts";
import { foldedFrequency } from "../../src/signal/fold.ts";
import { intervalSeconds, timeOf } from "../../src/signal/grid.ts";
import { FILLED } from "../../src/signal/marks.ts";
import { gainAt } from "../../src/signal/response.ts";
import { decimate } from "../../src/stages/decimate.ts";
import type { AliasDesign, Signal } from "../../src/stages/stage.ts";
import { type Entry, evenRows, planOf, run } from "../engine/harness.ts";
import reference from "../reference/15-decimation.json" with { type: "json" };
import { BRIDGED, clean, largest, present, SECONDS } from "./parts/small.ts";

const keep = (settings: Record<string, unknown>): Entry => ({ stage: "decimate", ...settings });
const UNGUARDED = { "anti-alias": "upstream", "accept-aliasing": true };
const NO = Number.NaN;

/** Design after filters that the channels have passed, at 1 s. */
function designAfter(filters: readonly (readonly number[])[], settings: Record<string, unknown>) {
  const channels = filters.map((_, c) => ({ name: `c${c}`, unit: "m" }));
  const signal: Signal = {
    grid: planOf([SECONDS]).outGrid,
    channels,
    filters: filters.map((taps) => [{ taps: Float64Array.from(taps), interval_s: 1 }]),
    finest_s: 1,
  };
  const all = channels.map((_, c) => c);
  return decimate.design(decimate.settings.parse(settings), signal, all);
}

/** Twin: worst gain of what lands in the band kept, on a dense grid, against the largest in that band. */
function worstByScan(taps: readonly number[], factor: number, share: number): number {
  const h = Float64Array.from(taps);
  let worst = 0;
  let kept = 0;
  for (let i = 0; i <= 40_000; i++) {
    const f = i / 80_000;
    const gain = gainAt(h, f);
    const stays = f <= 0.5 / factor;
    const lands = stays ? f : foldedFrequency(f, 1 / factor).frequency;
    if (lands > share / factor) continue;
    if (stays) kept = Math.max(kept, gain);
    else worst = Math.max(worst, gain);
  }
  return 20 * Math.log10(worst / kept);
}

describe("against reference 15", () => {
  const of = (id: string) => reference.cases.find((c) => c.id === id)!;
  const limit = (x: readonly number[]) => 1e-12 * largest(x);

  it("hamm11-by3: centred, full windows only, indices that are multiples of the factor", () => {
    const { inputs, expected } = of("hamm11-by3");
    const x = inputs.x as number[];
    const got = present(
      clean([SECONDS, { stage: "fir", coefficients: inputs.taps }, keep({ by: 3, ...UNGUARDED })], x),
    );
    const { firstInputIndex, step, y } = expected.centredFullWindowOnly!;
    expect(got.map(([t]) => t)).toEqual(y.map((_, i) => firstInputIndex + step * i));
    for (const [i, [, v]] of got.entries()) expect(Math.abs(v - y[i]!)).toBeLessThanOrEqual(limit(x));
  });

  it.each(["ma4-by4", "hamm11-by3"])("%s: past only, where the window is full", (id) => {
    const { inputs, expected } = of(id);
    const [x, taps, down] = [inputs.x as number[], inputs.taps as number[], inputs.down!];
    const filter = { stage: "fir", coefficients: taps, reach: "past-only" };
    const got = present(clean([SECONDS, filter, keep({ by: down, ...UNGUARDED })], x));
    expect(got[0]![0]).toBe(Math.ceil((taps.length - 1) / down) * down);
    expect(got.length).toBeGreaterThan(5);
    for (const [t, v] of got)
      expect(Math.abs(v - (expected.upfirdn as number[])[t / down]!)).toBeLessThanOrEqual(limit(x));
  });

  it("scipy-decimate-q2: a windowed sinc above, where its window is full", () => {
    const { inputs, expected } = of("scipy-decimate-q2");
    const x = inputs.x as number[];
    const filter = { stage: "fir", shape: "low-pass", taps: 41, edge: "0.25 Hz", window: "hamming" };
    const got = present(clean([SECONDS, filter, keep({ by: 2, ...UNGUARDED })], x));
    expect(got.length).toBe(10);
    for (const [t, v] of got)
      expect(Math.abs(v - (expected.y as number[])[t / 2]!)).toBeLessThanOrEqual(limit(x));
  });

  it("alias-rejection-q4-N41: the gain just above the new Nyquist frequency", () => {
    const { expected } = of("alias-rejection-q4-N41");
    const taps = planOf([SECONDS, { stage: "fir", shape: "low-pass", taps: 41, edge: "0.1 Hz" }]).stages[0]!
      .design.taps!;
    expect(Math.abs(gainAt(taps, 0.125) / expected.maxGainAtOrAboveNewNyquist! - 1)).toBeLessThan(1e-6);
    // What lands in the band kept comes from 0.13 Hz up, so it is a little weaker.
    const alias = designAfter([[...taps]], { by: 4, "passband-share": "48 %", ...UNGUARDED }).design!.alias!;
    expect(alias.worstGain_dB).toBeLessThan(expected.maxGainDb!);
    const scanned = worstByScan([...taps], 4, 0.48);
    expect(alias.worstGain_dB).toBeGreaterThan(scanned - 1e-9);
    expect(alias.worstGain_dB).toBeLessThan(scanned + 0.05);
  });
});

describe("the check on the design", () => {
  const lowPass = [
    ...planOf([SECONDS, { stage: "fir", shape: "low-pass", taps: 61, edge: "0.08 Hz" }]).stages[0]!.design
      .taps!,
  ];
  const alias = (filters: readonly (readonly number[])[], settings: Record<string, unknown>): AliasDesign =>
    designAfter(filters, { ...settings, ...UNGUARDED }).design!.alias!;

  it("finds the worst that folds, as a scan over all frequencies does", () => {
    const means = [new Array(4).fill(0.25), new Array(9).fill(1 / 9), [0.25, 0.5, 0.25]];
    for (const taps of [...means, lowPass])
      for (const by of [2, 3, 4, 7])
        for (const share of [0.1, 0.4, 0.49]) {
          const found = alias([taps], { by, "passband-share": `${100 * share} %` });
          expect(found.keptTo_Hz).toBeCloseTo(share / by, 12);
          // The scan's step cannot meet the worst frequency exactly, but never finds more.
          const scanned = worstByScan(taps, by, share);
          expect(found.worstGain_dB).toBeGreaterThan(scanned - 1e-9);
          expect(found.worstGain_dB).toBeLessThan(scanned + 0.02);
        }
  });

  it("names the frequency that folds, and where it lands", () => {
    const { problems } = designAfter([new Array(4).fill(0.25)], { by: 4, "anti-alias": "upstream" });
    // The mean of 4 has its nulls at the multiples of the new rate; worst is the edge of the band kept.
    expect(problems[0]!.problem).toContain("fold 0.15 Hz to 0.1 Hz");
    const found = alias([new Array(4).fill(0.25)], { by: 4 });
    expect(found.source_Hz).toBeCloseTo(0.15, 9);
    expect(found.worstGain_dB).toBeCloseTo(20 * Math.log10(gainAt(new Float64Array(4).fill(0.25), 0.15)), 9);
  });

  it("judges every channel by its own filters, of whatever length", () => {
    const nothing = lowPass.map((_, i) => (i === 30 ? 1 : 0));
    const by = { by: 4, "anti-alias": "upstream" };
    expect(designAfter([lowPass, lowPass], by).problems).toEqual([]);
    for (const filters of [
      [lowPass, nothing],
      [nothing, lowPass],
    ]) {
      const { problems } = designAfter(filters, by);
      expect(problems.map((p) => p.code)).toEqual(["aliases-on-design"]);
      expect(alias(filters, { by: 4 }).worstGain_dB).toBeCloseTo(0, 12);
    }
  });

  it("compares with what is kept: a change of unit above is no protection", () => {
    expect(alias([[0.0001]], { by: 4 }).worstGain_dB).toBeCloseTo(0, 12);
    expect(alias([lowPass.map((w) => 1000 * w)], { by: 4 }).worstGain_dB).toBeCloseTo(
      alias([lowPass], { by: 4 }).worstGain_dB,
      9,
    );
    // Above a high-pass, what folds is all there is.
    expect(designAfter([[0.5, -0.5]], { by: 4, "anti-alias": "upstream" }).design).toBeNull();
  });

  it("counts the filters at the present rate only", () => {
    const chain = [SECONDS, { stage: "moving-average", points: 9 }, keep({ by: 3 })];
    const { design } = planOf([...chain, keep({ by: 3, ...UNGUARDED })]).stages[2]!;
    expect(design.alias!.worstGain_dB).toBeCloseTo(0, 12);
    expect(design.alias!.keptTo_Hz).toBeCloseTo(0.4 / 9, 12);
  });

  it("its own filter keeps the band kept within 0.01 dB, and takes out what would fold into it", () => {
    for (const [by, share, attenuation] of [
      [2, 0.4, 80],
      [10, 0.45, 100],
      [7, 0.2, 60],
    ] as const) {
      const plan = planOf([
        SECONDS,
        keep({ by, "passband-share": `${share * 100} %`, attenuation: `${attenuation} dB` }),
      ]);
      const { taps, alias: found } = plan.stages[0]!.design;
      for (let i = 0; i <= 100; i++) {
        const kept = gainAt(taps!, (share * i) / 100 / by);
        expect(Math.abs(20 * Math.log10(kept))).toBeLessThanOrEqual(0.01 + 1e-9);
      }
      expect(gainAt(taps!, 0)).toBeCloseTo(1, 14);
      for (let i = 0; i <= 1000; i++) {
        const f = (1 - share) / by + ((0.5 - (1 - share) / by) * i) / 1000;
        expect(gainAt(taps!, f)).toBeLessThanOrEqual(10 ** (-attenuation / 20) * (1 + 1e-6));
      }
      expect(found!.worstGain_dB).toBeLessThanOrEqual(-attenuation + 0.02);
      expect(found!.met).toBe(true);
    }
  });
});

describe("the samples kept", () => {
  it("stand on multiples of the new interval, wherever the record begins, before 1970 too", () => {
    for (const start of [-17, -1, 0, 3, 1_000_003]) {
      const x = Array.from({ length: 60 }, (_, i) => 10 * (start + i));
      const got = clean([SECONDS, keep({ by: 7, ...UNGUARDED })], x, start);
      expect(got.t[0]).toBe(Math.ceil(start / 7) * 7 + 0);
      got.t.forEach((t, i) => {
        expect(Math.abs(t % 7)).toBe(0);
        expect(got.y[i]).toBe(10 * t);
      });
      expect(got.t.at(-1)).toBe(Math.floor((start + 59) / 7) * 7);
    }
  });

  it("keep a straight line where it is: no shift by the filter", () => {
    const x = Array.from({ length: 400 }, (_, i) => 3 + 0.5 * (i - 123));
    const got = present(clean([SECONDS, keep({ by: 5 })], x, -123));
    expect(got.length).toBeGreaterThan(40);
    for (const [t, v] of got) expect(Math.abs(v - (3 + 0.5 * t))).toBeLessThan(1e-11);
  });

  it("after an even window stand half an old interval later", () => {
    const chain = [SECONDS, { stage: "moving-average", points: 4 }, keep({ by: 6, ...UNGUARDED })];
    const x = Array.from({ length: 60 }, (_, i) => i - 20);
    const got = present(clean(chain, x, -20));
    expect(got.map(([t]) => t)).toEqual([-17.5, -11.5, -5.5, 0.5, 6.5, 12.5, 18.5, 24.5, 30.5, 36.5]);
    for (const [t, v] of got) expect(v).toBe(t);
  });

  it("follow an anchor", () => {
    const grid = { ...SECONDS, anchor: "1970-01-01T00:00:02Z" };
    const got = clean([grid, keep({ to: "5 s", ...UNGUARDED })], new Array(20).fill(1), -7);
    expect(got.t).toEqual([-3, 2, 7, 12]);
  });

  it("come out the same by factor, by interval and by rate", () => {
    const at = (settings: Record<string, unknown>) =>
      planOf([{ stage: "resample", rate: "360 Hz" }, keep(settings)]);
    for (const settings of [{ by: 9 }, { to: "25 ms" }, { to: "40 Hz" }]) {
      const plan = at(settings);
      expect(plan.stages[0]!.design.keepEvery).toBe(9);
      expect(intervalSeconds(plan.outGrid)).toBe(0.025);
      expect(timeOf(plan.outGrid, -3)).toBe(-75_000);
    }
  });

  it("carry the marks of all that they rest on, and of nothing else", () => {
    const chain = [BRIDGED, { stage: "moving-average", points: 5 }, keep({ by: 10, ...UNGUARDED })];
    for (const [lost, filled] of [
      [20, [20]],
      [22, [20]],
      [23, []],
      [27, []],
      [28, [30]],
    ] as const) {
      const x = Array.from({ length: 60 }, (_, i) => (i === lost ? undefined : i));
      const { marks, t } = clean(chain, x);
      expect(marks.flatMap((m, i) => ((m & FILLED) !== 0 ? [t[i]] : []))).toEqual(filled);
    }
  });

  it("are as many as the account says, in each state", () => {
    const x = Array.from({ length: 300 }, (_, i) => (i > 100 && i < 140 ? NO : Math.sin(i)));
    const plan = planOf([SECONDS, keep({ by: 4 }), { stage: "report" }]);
    const { results, clean: series } = run(plan, evenRows(x, 1e6, -51e6));
    const { counts } = results[0]!.measures[0]!;
    expect(counts.samples).toBe(75);
    expect(series[0]!.length).toBe(75);
    expect(counts.states().missing).toBe(series[0]!.filter(Number.isNaN).length);
    const account = stageDesignAccount(plan, plan.stages[0]!);
    expect(account.out.interval_s).toBe(4);
    expect(account.end_s).toBe((account.taps! - 1) / 2);
    expect(account.look_ahead_s).toBe((account.taps! - 1) / 2);
  });
});
