/**
 * `moving-average`: the mean, or a weighted mean, of the samples inside a sliding window.
 * Gain of N equal weights: |sin(pi f N) / (N sin(pi f))|, f in cycles/sample; delay (N - 1) / 2 samples
 * (closed form of the geometric sum; any text on signal processing).
 */
import type { z } from "zod";
import { count, duration, oneOf, percent, stageSettings } from "../pipeline/kinds.ts";
import { listedOrNamed } from "../pipeline/listed-or-named.ts";
import { halfStepLater, intervalSeconds } from "../signal/grid.ts";
import { weightedAverage } from "../signal/weighted-averages.ts";
import { WindowKernel } from "../signal/window-kernel.ts";
import { unevenSelection, windowPoints } from "./parts/lengths.ts";
import type { DesignOutcome, Problem, Signal, Stage } from "./stage.ts";

const LONGEST = 1_000_000;

const settings = stageSettings("moving-average", {
  points: count({ min: 1, max: LONGEST, about: "Number of samples in the window." }).optional(),
  over: duration({ about: "Length of the window: a whole number of sample intervals." }).optional(),
  weights: listedOrNamed({
    max: 20_001,
    names: "spencer-15|spencer-21|henderson-[1-9]\\d*|[1-9]\\d*x[1-9]\\d*",
    such: ["spencer-15", "henderson-13", "2x12"],
    about:
      "Weights in order of time, rescaled to a sum of 1, or a published set by name; equal when left out.",
  }).optional(),
  reach: oneOf(["both-sides", "past-only"], {
    default: "both-sides",
    about:
      "Samples that the window may use: both sides of its time (no delay, uses the future) or the past only.",
  }),
  coverage: percent({
    min: 0.01,
    max: 1,
    default: "100 %",
    about: "Share of the window's samples that must be present; below 100 % the others are left out.",
  }),
  ends: oneOf(["blank", "part-window", "turned"], {
    default: "blank",
    about:
      "At the ends of a run: no value, the part of the window inside, or the signal turned about its end.",
  }),
});
type Settings = z.output<typeof settings>;

function design(s: Settings, signal: Signal, selected: readonly number[]): DesignOutcome {
  const grid = signal.grid!;
  const interval = intervalSeconds(grid);
  const problems: Problem[] = [];
  const given = [s.points, s.over, s.weights].filter((x) => x !== undefined).length;
  if (given !== 1)
    problems.push({
      code: "window-length",
      severity: "error",
      path: [],
      problem: "a moving average needs its length once",
      given: given === 0 ? "none of points, over, weights" : "more than one of points, over, weights",
      allowed: "one of points, over, weights",
      todo: "keep one of them",
    });
  const named = typeof s.weights === "string" ? weightedAverage(s.weights) : null;
  if (typeof s.weights === "string" && named === null)
    problems.push({
      code: "unknown-weights",
      severity: "error",
      path: ["weights"],
      problem: "there is no published average of this name",
      given: s.weights,
      allowed: "spencer-15, spencer-21, henderson-N (N odd, 5 to 1001), AxB (a mean of A means of B)",
      todo: "write one of them, or list the weights",
    });
  const weights = named ?? (typeof s.weights === "string" ? undefined : s.weights);
  const n =
    weights?.length ??
    s.points ??
    (s.over === undefined ? undefined : windowPoints(s.over, grid, ["over"], LONGEST, problems));
  const sum = weights === undefined ? 1 : sumOf(weights);
  if (weights !== undefined && Math.abs(sum) < 1e-9 * sumOf(Array.from(weights, Math.abs)))
    problems.push({
      code: "weights-cancel",
      severity: "error",
      path: ["weights"],
      problem: "the weights add up to zero, so they cannot be rescaled to a mean",
      given: `a sum of ${sum}`,
      allowed: "weights with a sum other than zero",
      todo: "give such weights as the coefficients of a fir stage, which uses them as they are",
    });
  if (n === undefined) return { design: null, problems };
  const centred = s.reach === "both-sides";
  const even = n % 2 === 0;
  if (centred && even) unevenSelection(signal, selected, n, problems);
  if (problems.some((p) => p.severity === "error")) return { design: null, problems };

  const equal = weights === undefined;
  // Weights are given in order of time; taps are in order of convolution.
  const taps = equal ? new Float64Array(n).fill(1 / n) : Float64Array.from(weights, (w) => w / sum).reverse();
  const after = centred ? Math.floor(n / 2) : 0;
  const symmetric = taps.every((w, i) => w === taps[n - 1 - i]);
  const delay = symmetric ? (n - 1) / 2 : centroid(taps);
  const compensated = centred ? (n - 1) / 2 : 0;
  return {
    problems,
    design: {
      grid: centred && even ? halfStepLater(grid) : grid,
      says: `Replaced each value by the ${equal ? "mean" : "weighted mean"} of ${n} samples (${seconds(n * interval)}) ${
        centred ? "centred on it" : "up to it"
      }${centred && even ? "; the even length puts the results half an interval later, half-way between samples" : ""}.`,
      settings: {
        points: n,
        over_s: n * interval,
        ...(typeof s.weights === "string" ? { "weights-named": s.weights } : {}),
        ...(equal ? {} : { weights: Array.from(taps).reverse() }),
        reach: s.reach,
        coverage_pct: s.coverage * 100,
        ends: s.ends,
      },
      taps,
      delay: { samples: delay, indexSamples: after, compensated_s: compensated * interval },
      reach: { before: n - 1 - after, after },
      end_s: (centred ? (n - 1) / 2 : n - 1) * interval,
      keepEvery: 1,
      alias: null,
      notes: {},
      kernel: () =>
        new WindowKernel({
          taps,
          after,
          ends: s.ends,
          coverage: s.coverage,
          keepEvery: 1,
          equal,
          betweenSamples: centred && even,
        }),
    },
  };
}

const sumOf = (list: ArrayLike<number>): number => Array.from(list).reduce((a, w) => a + w, 0);

/** Delay of weights without symmetry at low frequency: their centre of gravity, in samples. */
function centroid(taps: Float64Array): number {
  return taps.reduce((sum, w, i) => sum + w * i, 0) / taps.reduce((sum, w) => sum + w, 0);
}

const seconds = (s: number): string => `${Number(s.toPrecision(6))} s`;

export const movingAverage: Stage<typeof settings> = {
  name: "moving-average",
  about: "Smooths by the mean, or a weighted mean, of the samples inside a sliding window.",
  settings,
  design,
};
