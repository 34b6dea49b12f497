/**
 * `fir`: a designed finite impulse response filter. Designs and their sources: signal/windowed-sinc.ts,
 * signal/kaiser.ts, signal/specification.ts.
 */
import type { z } from "zod";
import {
  count,
  decibels,
  finite,
  frequency,
  list,
  oneOf,
  stageSettings,
  strictObject,
} from "../pipeline/kinds.ts";
import { halfStepLater, intervalSeconds } from "../signal/grid.ts";
import { symmetryOf } from "../signal/response.ts";
import { WindowKernel } from "../signal/window-kernel.ts";
import { chooseTaps } from "./parts/fir-taps.ts";
import { unevenSelection } from "./parts/lengths.ts";
import type { DesignOutcome, Problem, Signal, Stage } from "./stage.ts";

const settings = stageSettings("fir", {
  shape: oneOf(["low-pass", "high-pass", "band-pass", "band-stop"], {
    about: "What the filter lets pass.",
  }).optional(),
  pass: list(frequency({ about: "A passband edge." }), {
    min: 1,
    max: 2,
    single: true,
    about: "Passband edge, two for band shapes; with stop: the shortest filter between them is designed.",
  }).optional(),
  stop: list(frequency({ about: "A stopband edge." }), {
    min: 1,
    max: 2,
    single: true,
    about: "Stopband edge, two for band shapes.",
  }).optional(),
  ripple: decibels({
    min: 1e-6,
    max: 12,
    about: "Largest departure from gain 1 in the passband; default 0.1 dB.",
  }).optional(),
  attenuation: decibels({
    min: 1,
    max: 200,
    about: "Least attenuation in the stopband; default 60 dB.",
  }).optional(),
  method: oneOf(["auto", "windowed-sinc", "equiripple", "least-squares", "savitzky-golay"], {
    default: "auto",
    about:
      "How the taps are designed; auto takes the shortest that keeps a specification, or windowed-sinc for a given size.",
  }),
  taps: count({ min: 1, max: 20_001, about: "Number of taps; with edge and window." }).optional(),
  edge: list(frequency({ about: "An edge where the gain is -6 dB." }), {
    min: 1,
    max: 2,
    single: true,
    about: "The -6 dB edge, two for band shapes.",
  }).optional(),
  window: oneOf(["kaiser", "hann", "hamming", "blackman", "triangular", "rectangular"], {
    about: "Window of a filter of given size; default hamming. Triangular has zero end points.",
  }).optional(),
  beta: finite({ min: 0, max: 100, about: "Shape of the Kaiser window." }).optional(),
  bands: list(
    strictObject(
      {
        from: frequency({ zero: true, about: "Lower limit." }),
        to: frequency({ zero: true, about: "Upper limit." }),
        gain: list(finite({ min: -100, max: 100, about: "A gain." }), {
          min: 1,
          max: 2,
          single: true,
          about: "Gain wanted, or its values at both limits with a straight line between.",
        }),
        weight: finite({ min: 1e-6, max: 1e6, default: 1, about: "Weight of the error in this band." }),
      },
      "A band and the gain wanted in it; what lies between bands is free.",
    ),
    { min: 1, max: 12, about: "Bands of an equiripple or least-squares filter of given taps." },
  ).optional(),
  degree: count({
    min: 0,
    max: 20,
    about: "Degree of the local polynomial of a savitzky-golay filter.",
  }).optional(),
  coefficients: list(finite({ about: "A tap." }), {
    min: 1,
    max: 20_001,
    about: "Taps given as they are, in order of convolution: the first meets the newest sample.",
  }).optional(),
  reach: oneOf(["both-sides", "past-only"], {
    default: "both-sides",
    about:
      "Samples that the filter may use: both sides of its time (no delay, uses the future) or the past only.",
  }),
  ends: oneOf(["blank", "part-window", "turned"], {
    default: "blank",
    about:
      "At the ends of a run: no value, the part of the filter inside, or the signal turned about its end.",
  }),
});
export type FirSettings = z.output<typeof settings>;

function design(s: FirSettings, signal: Signal, selected: readonly number[]): DesignOutcome {
  const grid = signal.grid!;
  const interval = intervalSeconds(grid);
  const problems: Problem[] = [];
  const chosen = chooseTaps(s, interval, problems);
  if (chosen === null) return { design: null, problems };
  const { taps } = chosen;
  const n = taps.length;
  const centred = s.reach === "both-sides";
  const even = n % 2 === 0;
  const symmetry = symmetryOf(taps);
  if (centred && symmetry === "none")
    problems.push({
      code: "centred-needs-symmetry",
      severity: "error",
      path: ["reach"],
      problem:
        "taps without symmetry have no centre, so the filter cannot be centred without moving the signal",
      given: "both-sides with taps that are not symmetric",
      allowed: "symmetric taps, or past-only",
      todo: "set reach: past-only",
    });
  if (centred && even) unevenSelection(signal, selected, n, problems);
  const sum = taps.reduce((a, w) => a + w, 0);
  const magnitude = taps.reduce((a, w) => a + Math.abs(w), 0);
  if (s.ends === "part-window" && Math.abs(sum) < 1e-3 * magnitude)
    problems.push({
      code: "part-window-needs-mean",
      severity: "error",
      path: ["ends"],
      problem: "a part of the window cannot be rescaled when the filter does not pass a constant",
      given: `part-window with a gain of ${Number(sum.toPrecision(3))} at 0 Hz`,
      allowed: "blank or turned",
      todo: "set ends: blank",
    });
  if (problems.some((p) => p.severity === "error")) return { design: null, problems };
  const after = centred ? Math.floor(n / 2) : 0;
  const samples = symmetry === "none" ? chosen.delay : (n - 1) / 2;
  return {
    problems,
    design: {
      grid: centred && even ? halfStepLater(grid) : grid,
      says: `${chosen.says} ${n} taps, ${centred ? "centred, so nothing is delayed" : "past samples only, so the result is late"}.`,
      settings: { ...chosen.settings, reach: s.reach, ends: s.ends },
      taps,
      delay: { samples, indexSamples: after, compensated_s: centred ? ((n - 1) / 2) * interval : 0 },
      reach: { before: n - 1 - after, after },
      end_s: (centred ? (n - 1) / 2 : n - 1) * interval,
      keepEvery: 1,
      alias: null,
      notes: chosen.notes,
      kernel: () =>
        new WindowKernel({
          taps,
          after,
          ends: s.ends,
          coverage: 1,
          keepEvery: 1,
          equal: false,
          betweenSamples: centred && even,
        }),
    },
  };
}

export const fir: Stage<typeof settings> = {
  name: "fir",
  about: "Filters with a designed finite impulse response: low-pass, high-pass, band-pass or band-stop.",
  settings,
  design,
};
