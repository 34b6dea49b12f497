/** The table of the contract test: every stage, with the settings under which it is held to the contract. */
import type { Entry } from "../../engine/harness.ts";
import { lengthOf, type Rate } from "./rates.ts";

export interface StageCase {
  readonly stage: string;
  readonly name: string;
  readonly settings: (rate: Rate) => Record<string, unknown>;
  /** Stages between the grid and this one. */
  readonly above?: readonly Entry[];
  /** What a constant becomes: itself, exactly nothing, or what the stated response at 0 Hz leaves of it. */
  readonly constant: "same" | "nothing" | "as stated";
  /** Samples of its input that one output rests on; null where the design chooses, or for a trend. */
  readonly window: number | null;
  /** One sample in this many is kept. */
  readonly keeps?: number;
}

const fixed = (settings: Record<string, unknown>) => () => settings;

function mean(name: string, settings: Record<string, unknown>, window: number): StageCase {
  return { stage: "moving-average", name, settings: fixed(settings), constant: "same", window };
}

function filter(
  name: string,
  settings: Record<string, unknown>,
  constant: StageCase["constant"],
  window: number | null,
): StageCase {
  return { stage: "fir", name, settings: fixed(settings), constant, window };
}

const LOW = { shape: "low-pass", taps: 41, edge: "0.05 cycles/sample" };
const UPSTREAM: Entry = {
  stage: "fir",
  shape: "low-pass",
  pass: "0.05 cycles/sample",
  stop: "0.12 cycles/sample",
  attenuation: "70 dB",
  method: "windowed-sinc",
};

export const CASES: readonly StageCase[] = [
  ...[
    { name: "straight line", settings: {} },
    { name: "nearest sample", settings: { between: "nearest-sample" } },
    { name: "monotone cubic", settings: { between: "monotone-cubic" } },
    { name: "local cubic", settings: { between: "local-cubic" } },
    { name: "band-limited", settings: { between: "band-limited" } },
    { name: "cell mean", settings: { between: "cell-mean" }, window: 3 },
    { name: "off the epoch", settings: { anchor: "1969-12-31T23:59:59.9987Z" } },
  ].map(
    // On rows that stand on the grid times; a cell reaches half-way to the rows on either side.
    ({ name, settings, window = 1 }): StageCase => ({
      stage: "resample",
      name,
      settings: fixed(settings),
      constant: "same",
      window,
    }),
  ),

  ...[0, 1, 3].map(
    (degree): StageCase => ({
      stage: "detrend",
      name: `degree ${degree} over spans`,
      settings: (rate) => ({ degree, over: lengthOf(rate, 90) }),
      constant: "nothing",
      window: null,
    }),
  ),
  {
    stage: "detrend",
    name: "line over the whole record",
    settings: fixed({ degree: 1, over: "whole" }),
    constant: "nothing",
    window: null,
  },

  mean("one point", { points: 1 }, 1),
  mean("odd", { points: 7 }, 7),
  mean("even", { points: 8 }, 8),
  mean("longer than a small block", { points: 201 }, 201),
  mean("past only", { points: 7, reach: "past-only" }, 7),
  mean("even, past only", { points: 8, reach: "past-only" }, 8),
  mean("weighted", { weights: [1, 2, 3, 2, 1] }, 5),
  mean("weighted, even", { weights: [1, 3, 3, 1] }, 4),
  mean("lopsided weights, centred", { weights: [1, 2, 4] }, 3),
  mean("lopsided weights, past only", { weights: [1, 2, 4, 9], reach: "past-only" }, 4),
  mean("weights that look ahead", { weights: [-1, 2, 9], reach: "past-only" }, 3),
  mean("published weights", { weights: "spencer-15" }, 15),
  mean("published weights, past only", { weights: "2x12", reach: "past-only" }, 13),
  mean("thin", { points: 9, coverage: "60 %" }, 9),
  mean("thin, even", { points: 10, coverage: "60 %" }, 10),
  mean("part of the window", { points: 9, ends: "part-window" }, 9),
  mean("part of the window, even", { points: 8, ends: "part-window" }, 8),
  mean("turned", { points: 9, ends: "turned" }, 9),
  mean("turned, even", { points: 8, ends: "turned" }, 8),
  mean("turned, past only", { points: 9, ends: "turned", reach: "past-only" }, 9),
  mean("thin, then turned", { weights: [1, 1, 4, 1, 1], coverage: "80 %", ends: "turned" }, 5),

  filter("low-pass of given size", LOW, "same", 41),
  filter("even low-pass", { ...LOW, taps: 40, window: "kaiser", beta: 6 }, "same", 40),
  filter("low-pass, past only", { ...LOW, window: "blackman", reach: "past-only" }, "same", 41),
  filter("part of the window", { ...LOW, ends: "part-window" }, "same", 41),
  filter("turned", { ...LOW, ends: "turned" }, "same", 41),
  filter("high-pass", { shape: "high-pass", taps: 31, edge: "0.2 cycles/sample" }, "as stated", 31),
  filter(
    "band-stop",
    { shape: "band-stop", taps: 61, edge: ["0.1 cycles/sample", "0.2 cycles/sample"] },
    "same",
    61,
  ),
  filter(
    "band-pass",
    { shape: "band-pass", taps: 61, edge: ["0.1 cycles/sample", "0.2 cycles/sample"] },
    "as stated",
    61,
  ),
  filter(
    "shortest that keeps a specification",
    { shape: "low-pass", pass: "0.1 cycles/sample", stop: "0.2 cycles/sample" },
    "as stated",
    null,
  ),
  filter(
    "bands by least squares, even",
    {
      method: "least-squares",
      taps: 24,
      bands: [
        { from: "0 Hz", to: "0.1 cycles/sample", gain: 1 },
        { from: "0.2 cycles/sample", to: "0.5 cycles/sample", gain: 0, weight: 10 },
      ],
    },
    "as stated",
    24,
  ),
  filter("local polynomial", { method: "savitzky-golay", taps: 11, degree: 3 }, "same", 11),
  filter(
    "local polynomial at its newest sample",
    { method: "savitzky-golay", taps: 11, degree: 2, reach: "past-only" },
    "same",
    11,
  ),
  filter("given, with a gain", { coefficients: [0.5, 2, 0.5] }, "as stated", 3),
  filter("difference of neighbours", { coefficients: [1, -1] }, "nothing", 2),
  filter("difference across a sample", { coefficients: [0.5, 0, -0.5] }, "nothing", 3),
  filter("without symmetry", { coefficients: [4, 2, 1], reach: "past-only" }, "as stated", 3),
  filter("part of a sample ahead", { coefficients: [1.375, -0.375], reach: "past-only" }, "same", 2),
  filter("one sample ahead", { coefficients: [1, 0.5, 0, -0.5], reach: "past-only" }, "same", 4),

  {
    stage: "decimate",
    name: "own filter",
    settings: fixed({ by: 4 }),
    constant: "same",
    window: null,
    keeps: 4,
  },
  {
    stage: "decimate",
    name: "to an interval",
    settings: (rate) => ({ to: lengthOf(rate, 9), attenuation: "65 dB", "passband-share": "30 %" }),
    constant: "same",
    window: null,
    keeps: 9,
  },
  {
    stage: "decimate",
    name: "relying on the filter above",
    above: [UPSTREAM],
    settings: fixed({ by: 5, "anti-alias": "upstream" }),
    constant: "same",
    window: 1,
    keeps: 5,
  },
  {
    stage: "decimate",
    name: "aliasing accepted",
    settings: fixed({ by: 3, "anti-alias": "upstream", "accept-aliasing": true }),
    constant: "same",
    window: 1,
    keeps: 3,
  },

  { stage: "report", name: "defaults", settings: fixed({}), constant: "same", window: 1 },
  {
    stage: "report",
    name: "bands and octaves",
    settings: fixed({
      resolution: "0.04 cycles/sample",
      bands: { slow: { from: "0 Hz", to: "0.1 cycles/sample" } },
      "third-octaves": true,
    }),
    constant: "same",
    window: 1,
  },
];
