import { readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import { DiagnosticError } from "../../src/diagnostics.ts";
import { channelAccount } from "../../src/report/channel-account.ts";
import { type Entry, evenRows, planOf, run } from "../engine/harness.ts";
import { clean, SECONDS } from "./parts/small.ts";

const report = (settings: Record<string, unknown> = {}): Entry => ({ stage: "report", ...settings });
const MEAN: Entry = { stage: "moving-average", points: 5 };
const FEWER: Entry = { stage: "decimate", by: 4 };
const noise = Float64Array.from({ length: 3000 }, (_, i) => Math.sin(i / 5) + ((i * 7919) % 613) / 613);

describe("report", () => {
  it("passes the data unchanged, marks included", () => {
    const x = Array.from(noise.subarray(0, 500), (v, i) => (i % 50 === 7 ? Number.NaN : v));
    const with1 = clean([SECONDS, MEAN, report()], x);
    const without = clean([SECONDS, MEAN], x);
    expect(with1.y).toEqual(without.y);
    expect(with1.marks).toEqual(without.marks);
    expect(with1.t).toEqual(without.t);
  });

  it("accounts for the stages above it, and for none below", () => {
    const plan = planOf([SECONDS, MEAN, report(), FEWER]);
    expect(plan.stages.map((s) => s.accounted)).toEqual([true, false, false]);
    expect(plan.gridStage.accounted).toBe(false);
    expect(planOf([SECONDS, MEAN, FEWER]).stages.map((s) => s.accounted)).toEqual([false, false]);
    const { results } = run(plan, evenRows(noise, 1e6));
    const [mean, itself, fewer] = results[0]!.measures;
    expect(mean!.comparison).not.toBeNull();
    expect(mean!.cross).not.toBeNull();
    expect(itself!.comparison).toBeNull();
    expect(fewer!.comparison).toBeNull();
    // The limit on what folds is watched whether or not it is accounted for.
    expect(fewer!.alias).not.toBeNull();
  });

  it("meets or betters the resolution asked for, at every rate of the chain", () => {
    for (const asked of ["10 mHz", "3 mHz", "100 s"]) {
      const plan = planOf([SECONDS, MEAN, FEWER, MEAN, report({ resolution: asked })]);
      const { results } = run(plan, evenRows(noise, 1e6));
      const hertz = { "10 mHz": 0.01, "3 mHz": 0.003, "100 s": 0.01 }[asked]!;
      for (const i of [0, 2]) {
        const { resolution_Hz, segment } = results[0]!.measures[i]!.spectra!.plan;
        expect(resolution_Hz).toBeLessThanOrEqual(hertz);
        expect(resolution_Hz).toBeGreaterThan(hertz / 2);
        expect(Math.log2(segment) % 1).toBe(0);
      }
      expect(results[0]!.measures[0]!.spectra!.plan.segment).toBe(
        4 * results[0]!.measures[2]!.spectra!.plan.segment,
      );
    }
  });

  it("takes cycles/sample at its own rate, after decimation", () => {
    const bands = { slow: { from: "0 Hz", to: "0.1 cycles/sample" }, quick: { from: "8 s", to: "4 s" } };
    expect(planOf([SECONDS, report({ bands })]).report!.bands).toEqual([
      { name: "slow", from_Hz: 0, to_Hz: 0.1 },
      { name: "quick", from_Hz: 0.125, to_Hz: 0.25 },
    ]);
    expect(planOf([SECONDS, FEWER, report({ bands })]).report!.bands[0]).toEqual({
      name: "slow",
      from_Hz: 0,
      to_Hz: 0.025,
    });
    const resolution = "0.01 cycles/sample";
    expect(planOf([SECONDS, FEWER, report({ resolution })]).report!.resolution_Hz).toBe(0.0025);
  });

  it("tells the bands by name in the order given, and third octaves when asked", () => {
    const bands = { b: { from: "0.2 Hz", to: "0.3 Hz" }, a: { from: "0.01 Hz", to: "0.05 Hz" } };
    const account = (settings: Record<string, unknown>) => {
      const plan = planOf([SECONDS, MEAN, report(settings)]);
      const { results } = run(plan, evenRows(noise, 1e6));
      return channelAccount(plan, plan.stages[0]!, results[0]!.measures[0]!, "m");
    };
    const named = account({ bands }).bands.map((band) => band.name);
    expect(named.filter((name) => name === "a" || name === "b")).toEqual(["b", "a"]);
    const more = account({ bands, "third-octaves": true }).bands;
    expect(more.length).toBeGreaterThan(named.length + 5);
    expect(account({ tones: 0 }).tones).toEqual([]);
    expect(account({ window: "blackman" }).spectrum!.window).toBe("blackman");
  });

  it("with channels left out, still accounts for what was done to them", () => {
    const plan = planOf([SECONDS, { ...MEAN, channels: ["a"] }, report()], ["a", "b"]);
    const { results } = run(plan, { times: evenRows(noise, 1e6).times, columns: [noise, noise] });
    expect(results[0]!.measures[0]!.comparison!.sums.figures()!.varianceRemoved).toBeGreaterThan(0.01);
    expect(results[1]!.measures[0]!.active).toBe(false);
    expect(results[1]!.measures[0]!.comparison).toBeNull();
  });
});

const SCREEN: Entry = { stage: "screen", range: [0, 6] };
const HALF: Entry = { stage: "calibrate", polynomial: [0, 1], unit: "ft", until: "2031-01-01" };
const ORDERS: [string, Entry[], string[]][] = [
  ["nothing at all", [], ["no-grid"]],
  ["smoothing before the grid", [MEAN, SECONDS], ["before-grid"]],
  ["a report before the grid", [report(), SECONDS], ["before-grid"]],
  ["no grid", [MEAN], ["before-grid"]],
  ["two grids", [SECONDS, MEAN, SECONDS], ["second-grid"]],
  ["two reports", [SECONDS, report(), MEAN, report()], ["second-report"]],
  [
    "several at once",
    [MEAN, SECONDS, SECONDS, report(), { stage: "moving-average", over: "1.5 s" }, report()],
    ["before-grid", "second-grid", "not-whole-intervals", "second-report"],
  ],
  ["right", [SECONDS, MEAN, report(), FEWER], []],
  ["screening after smoothing", [SECONDS, MEAN, SCREEN], ["after-grid"]],
  ["screening after the grid", [SECONDS, SCREEN], ["after-grid"]],
  ["a channel in two units", [HALF, SECONDS], ["half-calibrated"]],
];

describe("the order of stages", () => {
  const codesOf = (chain: readonly Entry[]): string[] => {
    try {
      planOf(chain);
      return [];
    } catch (error) {
      if (!(error instanceof DiagnosticError)) throw error;
      for (const d of error.diagnostics)
        for (const words of [d.problem, d.given, d.allowed, d.todo]) expect(words).toBeTruthy();
      return error.diagnostics.map((d) => d.code);
    }
  };

  it.each(ORDERS)("%s", (_, chain, codes) => {
    expect(codesOf(chain)).toEqual(codes);
  });

  it("every code of the plan is provoked above", () => {
    const codes = ["plan.ts", "plan-order.ts"].flatMap((file) =>
      Array.from(
        readFileSync(new URL(`../../src/pipeline/${file}`, import.meta.url), "utf8").matchAll(
          /\bcode: "([a-z-]+)"/g,
        ),
        (match) => match[1]!,
      ),
    );
    expect(new Set(ORDERS.flatMap(([, , told]) => told))).toEqual(new Set([...codes, "not-whole-intervals"]));
  });

  it("a fault above a decimation is not told again as aliasing", () => {
    const chain = [
      SECONDS,
      { stage: "fir", shape: "low-pass", taps: 41, edge: "0.7 Hz" },
      { ...FEWER, "anti-alias": "upstream" },
    ];
    expect(codesOf(chain)).toEqual(["edge-above-nyquist"]);
  });
});
