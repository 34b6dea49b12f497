/** Every mistake that the design of a stage can find is provoked here once, with the setting it concerns. */
import { readdirSync, readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import { makeGrid } from "../../src/signal/grid.ts";
import { STAGES } from "../../src/stages/registry.ts";
import type { FilterTaps, GridDesign, Problem, Signal } from "../../src/stages/stage.ts";
import { ROW_MISTAKES } from "./parts/row-mistakes.ts";

interface Mistake {
  readonly stage: string;
  readonly settings: Record<string, unknown>;
  readonly code: string;
  readonly path: readonly (string | number)[];
  /** What its words must hold. */
  readonly says?: string;
  readonly warning?: true;
  /** Two channels, of which only the first is selected. */
  readonly some?: true;
  /** Filters that each channel has passed. */
  readonly above?: readonly (readonly number[])[];
  /** Interval of the grid, microseconds; 1 s when left out. */
  readonly interval_us?: number;
  /** Units of the channels a, b …, all of them selected. */
  readonly units?: readonly string[];
  /** Row stages: the channel is in this unit before 1971 already. */
  readonly converting?: string;
  /** Seen only with the log's own interval at hand, seconds. */
  readonly log_s?: number;
}

const low = { shape: "low-pass", taps: 21, edge: "0.1 Hz" };
const bands = [
  { from: "0 Hz", to: "0.1 Hz", gain: 1 },
  { from: "0.2 Hz", to: "0.5 Hz", gain: 0 },
];
const fir = (settings: Record<string, unknown>, code: string, ...path: (string | number)[]): Mistake => ({
  stage: "fir",
  settings,
  code,
  path,
});
const mean = (settings: Record<string, unknown>, code: string, ...path: (string | number)[]): Mistake => ({
  stage: "moving-average",
  settings,
  code,
  path,
});
const fewer = (settings: Record<string, unknown>, code: string, ...path: (string | number)[]): Mistake => ({
  stage: "decimate",
  settings,
  code,
  path,
});
const grid = (settings: Record<string, unknown>, code: string, ...path: (string | number)[]): Mistake => ({
  stage: "resample",
  settings,
  code,
  path,
});

const MISTAKES: readonly Mistake[] = [
  { ...grid({ interval: "1 s" }, "resample-some-channels", "channels"), some: true },
  { ...grid({}, "grid-interval"), says: "neither" },
  { ...grid({ interval: "1 s", rate: "1 Hz" }, "grid-interval"), says: "both" },
  grid({ interval: "0.5 us" }, "grid-interval-range", "interval"),
  grid({ rate: "2000 kHz" }, "grid-interval-range", "rate"),
  grid({ interval: "1 s", "longest-gap": "0.9 s" }, "longest-gap-short", "longest-gap"),
  { ...grid({ interval: "10 s" }, "resample-aliases", "interval"), log_s: 1, says: "decimate to 10 s" },
  { ...grid({ rate: "0.1 Hz" }, "resample-aliases", "rate"), log_s: 1 },
  { ...grid({ interval: "1 s", "longest-gap": "2 s" }, "longest-gap-below-log", "longest-gap"), log_s: 5 },

  { stage: "detrend", settings: { over: "90.5 s" }, code: "not-whole-intervals", path: ["over"] },
  { stage: "detrend", settings: { over: "3 s", degree: 2 }, code: "span-too-short", path: ["over"] },
  { stage: "detrend", settings: { over: "20 d" }, code: "window-too-long", path: ["over"], interval_us: 1 },

  { ...mean({}, "window-length"), says: "none of" },
  { ...mean({ points: 3, over: "3 s" }, "window-length"), says: "more than one" },
  mean({ points: 3, weights: [1, 1, 1] }, "window-length"),
  { ...mean({ over: "1.5 s" }, "not-whole-intervals", "over"), says: "write 1 s or 2 s" },
  { ...mean({ over: "0.2 s" }, "not-whole-intervals", "over"), says: "write 1 s or 2 s" },
  { ...mean({ over: "1 s" }, "not-whole-intervals", "over"), interval_us: 7812.5 * 3 },
  mean({ over: "12 d" }, "window-too-long", "over"),
  mean({ weights: [1, -2, 1] }, "weights-cancel", "weights"),
  mean({ weights: "henderson-4" }, "unknown-weights", "weights"),
  {
    ...mean({ points: 4 }, "even-length-on-some-channels", "channels"),
    some: true,
    says: "use 5 points",
  },

  fir({}, "fir-way"),
  { ...fir({ ...low, pass: "0.1 Hz" }, "fir-way"), says: "pass, taps, edge" },
  fir({ coefficients: [1], taps: 3 }, "fir-way"),
  { ...fir({ taps: 21, edge: "0.1 Hz" }, "missing-setting"), says: "add shape" },
  { ...fir({ shape: "low-pass", edge: "0.1 Hz" }, "missing-setting"), says: "add taps" },
  { ...fir({ shape: "low-pass", taps: 21 }, "missing-setting"), says: "add edge" },
  { ...fir({ shape: "low-pass", stop: "0.1 Hz" }, "missing-setting"), says: "add pass" },
  { ...fir({ shape: "low-pass", pass: "0.1 Hz" }, "missing-setting"), says: "add stop" },
  { ...fir({ method: "savitzky-golay", taps: 5 }, "missing-setting"), says: "add degree" },
  { ...fir({ method: "equiripple", bands }, "missing-setting"), says: "add taps" },
  { ...fir({ ...low, edge: "0.5 Hz" }, "edge-above-nyquist", "edge"), says: "below 0.5 Hz" },
  fir({ ...low, shape: "band-pass", edge: ["0.1 Hz", "0.7 Hz"] }, "edge-above-nyquist", "edge", 1),
  fir({ shape: "low-pass", pass: "0.7 Hz", stop: "0.8 Hz" }, "edge-above-nyquist", "pass"),
  fir({ ...low, edge: ["0.1 Hz", "0.2 Hz"] }, "edge-count", "edge"),
  fir({ ...low, shape: "band-stop" }, "edge-count", "edge"),
  fir({ ...low, shape: "band-pass", edge: ["0.2 Hz", "0.1 Hz"] }, "edge-order", "edge"),
  fir({ shape: "low-pass", pass: "0.2 Hz", stop: "0.1 Hz" }, "bands-overlap", "stop"),
  fir({ shape: "high-pass", pass: "0.1 Hz", stop: "0.2 Hz" }, "bands-overlap", "stop"),
  fir(
    { shape: "band-stop", pass: ["0.1 Hz", "0.4 Hz"], stop: ["0.05 Hz", "0.3 Hz"] },
    "bands-overlap",
    "stop",
  ),
  fir({ ...low, window: "kaiser" }, "kaiser-beta", "window"),
  fir({ ...low, beta: 5 }, "kaiser-beta", "beta"),
  { ...fir({ ...low, taps: 20, shape: "high-pass" }, "no-filter"), says: "21 taps" },
  fir({ ...low, taps: 2, window: "hann" }, "no-filter"),
  fir({ shape: "low-pass", pass: "0.1 Hz", stop: "0.10001 Hz", method: "windowed-sinc" }, "no-filter"),
  fir({ ...low, method: "equiripple" }, "fir-method", "method"),
  fir({ taps: 21, method: "windowed-sinc", bands }, "fir-method", "method"),
  fir(
    { shape: "low-pass", pass: "0.1 Hz", stop: "0.2 Hz", method: "savitzky-golay" },
    "fir-method",
    "method",
  ),
  fir({ ...low, method: "savitzky-golay", degree: 2 }, "fir-method", "shape"),
  fir({ ...low, method: "equiripple", bands }, "fir-way", "shape"),
  fir({ method: "savitzky-golay", taps: 6, degree: 2 }, "savitzky-golay-size", "taps"),
  fir({ method: "savitzky-golay", taps: 5, degree: 5 }, "savitzky-golay-size", "degree"),
  fir({ taps: 21, method: "equiripple", bands: [bands[1]!, bands[0]!] }, "band-limits", "bands", 1),
  fir(
    { taps: 21, method: "least-squares", bands: [bands[0]!, { from: "0.2 Hz", to: "0.6 Hz", gain: 0 }] },
    "band-limits",
    "bands",
    1,
  ),
  {
    ...fir(
      {
        taps: 41,
        method: "equiripple",
        bands: [
          { from: "0 Hz", to: "0.05 Hz", gain: 0 },
          { from: "0.06 Hz", to: "0.1 Hz", gain: 1 },
          { from: "0.35 Hz", to: "0.5 Hz", gain: 0 },
        ],
      },
      "free-band-peak",
      "bands",
    ),
    warning: true,
  },
  {
    ...fir(
      {
        shape: "band-pass",
        pass: ["0.15 Hz", "0.25 Hz"],
        stop: ["0.13 Hz", "0.4 Hz"],
        ripple: "0.5 dB",
        attenuation: "40 dB",
        method: "equiripple",
      },
      "free-band-peak",
      "method",
    ),
    warning: true,
  },
  { ...fir({ coefficients: [1, 2, 3] }, "centred-needs-symmetry", "reach"), says: "past-only" },
  { ...fir({ ...low, taps: 20 }, "even-length-on-some-channels", "channels"), some: true },
  fir({ coefficients: [1, -1], ends: "part-window" }, "part-window-needs-mean", "ends"),
  fir({ coefficients: [0, 0, 0] }, "nothing-passes", "coefficients"),

  { ...fewer({ by: 4 }, "decimate-some-channels", "channels"), some: true },
  { ...fewer({}, "decimation-factor"), says: "neither" },
  { ...fewer({ by: 4, to: "4 s" }, "decimation-factor"), says: "both" },
  fewer({ to: "1 s" }, "decimation-factor", "to"),
  fewer({ to: "2.5 s" }, "not-whole-intervals", "to"),
  fewer({ to: "0.4 Hz" }, "not-whole-intervals", "to"),
  fewer({ to: "2000000 s" }, "window-too-long", "to"),
  fewer({ by: 20_000, "passband-share": "49 %" }, "no-filter"),
  {
    ...fewer({ by: 4, "anti-alias": "upstream" }, "aliases-on-design", "anti-alias"),
    says: "at 0.0 dB",
  },
  {
    ...fewer({ by: 4, "anti-alias": "upstream" }, "aliases-on-design", "anti-alias"),
    above: [[0.25, 0.25, 0.25, 0.25]],
  },
  { ...fewer({ by: 4, attenuation: "40 dB" }, "aliases-on-design", "anti-alias"), says: "raise attenuation" },

  {
    stage: "report",
    settings: { resolution: "1 uHz" },
    code: "resolution-too-fine",
    path: ["resolution"],
  },
  {
    stage: "report",
    settings: { bands: { slosh: { from: "2 s", to: "10 s" } } },
    code: "empty-band",
    path: ["bands", "slosh"],
  },

  ...ROW_MISTAKES,
];

function problemsOf(m: Mistake): readonly Problem[] {
  const stage = STAGES.get(m.stage)!;
  const units = m.units ?? (m.some === true ? ["m", "m"] : ["m"]);
  const channels = units.map((_, c) => "ab"[c]!);
  const rows = m.stage === "resample" || stage.worksOn === "rows";
  const interval_s = (m.interval_us ?? 1e6) / 1e6;
  const filters = channels.map((_, c): FilterTaps[] => {
    const taps = m.above?.[c];
    return taps === undefined ? [] : [{ taps: Float64Array.from(taps), interval_s }];
  });
  const signal: Signal = {
    grid: rows ? null : makeGrid(2 * (m.interval_us ?? 1e6), 2),
    channels: channels.map((name, c) => ({
      name,
      unit: units[c]!,
      ...(m.converting === undefined
        ? {}
        : {
            converting: {
              unit: m.converting,
              spans: [{ from_us: Number.NEGATIVE_INFINITY, until_us: 31_536_000e6 }],
            },
          }),
    })),
    filters,
    finest_s: rows ? null : interval_s,
  };
  const { design, problems } = stage.design(
    stage.settings.parse(m.settings) as never,
    signal,
    m.some === true ? [0] : [...channels.keys()],
  );
  if (m.log_s === undefined) {
    expect(design === null).toBe(problems.some((p) => p.severity === "error"));
    return problems;
  }
  expect(problems).toEqual([]);
  return (design as GridDesign).checkInterval(m.log_s);
}

describe("mistakes that a stage's design finds", () => {
  it.each(MISTAKES.map((m) => [`${m.stage} ${JSON.stringify(m.settings)}: ${m.code}`, m] as const))(
    "%s",
    (_, m) => {
      const found = problemsOf(m);
      const problem = found.find((p) => p.code === m.code && p.path.join() === m.path.join());
      expect(problem, JSON.stringify(found)).toBeDefined();
      expect(problem!.severity).toBe(m.warning === true ? "warning" : "error");
      const { problem: what, given, allowed, todo } = problem!;
      for (const words of [what, given, allowed, todo]) {
        expect(words).toBeTruthy();
        expect(words).not.toMatch(/undefined|NaN|Infinity|\[object/);
      }
      if (m.says !== undefined) expect([what, given, allowed, todo].join("; ")).toContain(m.says);
    },
  );

  it("are all here: every code in the source is provoked above, and no other", () => {
    const here = new URL("../../src/stages/", import.meta.url);
    const files = ["", "parts/"].flatMap((folder) =>
      readdirSync(new URL(folder, here))
        .filter((name) => name.endsWith(".ts"))
        .map((name) => new URL(folder + name, here)),
    );
    const codes = files.flatMap((file) =>
      Array.from(readFileSync(file, "utf8").matchAll(/\bcode: "([a-z0-9-]+)"/g), (match) => match[1]!),
    );
    expect(codes.length).toBeGreaterThan(30);
    expect(new Set(MISTAKES.map((m) => m.code))).toEqual(new Set(codes));
  });

  it("do not stand in the way of settings that are right", () => {
    for (const [stage, settings] of [
      ["resample", { rate: "128 Hz" }],
      ["detrend", {}],
      ["moving-average", { over: "5 s" }],
      ["fir", low],
      ["fir", { ...low, window: "kaiser", beta: 5 }],
      ["fir", { taps: 21, method: "equiripple", bands }],
      ["decimate", { to: "0.25 Hz" }],
      ["report", { resolution: "1 mHz", bands: { slosh: { from: "10 s", to: "2 s" } } }],
    ] as const)
      expect(problemsOf({ stage, settings, code: "", path: [] })).toEqual([]);
    const { checkInterval } = STAGES.get("resample")!.design(
      STAGES.get("resample")!.settings.parse({ interval: "1 s", "accept-aliasing": true }) as never,
      { grid: null, channels: [], filters: [], finest_s: null },
      [],
    ).design as GridDesign;
    expect(checkInterval(0.1)).toEqual([]);
    expect(checkInterval(0.99)).toEqual([]);
    expect(checkInterval(1.5)).toEqual([]);
  });
});
