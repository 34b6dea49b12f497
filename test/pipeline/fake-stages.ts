/** Stages that exist only here: between them they use every kind of setting. */
import {
  count,
  decibels,
  duration,
  durationOr,
  durationOrRate,
  finite,
  frequency,
  instant,
  list,
  oneOf,
  percent,
  ppm,
  rate,
  rateOfChange,
  record,
  stageSettings,
  strictObject,
  truth,
} from "../../src/pipeline/kinds.ts";
import type { StageSchema, StageSchemas } from "../../src/pipeline/schema.ts";

const even = stageSettings("even", {
  interval: duration({ min: "1 us", max: "1 d", about: "Distance of two samples." }).optional(),
  rate: rate({ about: "The same as a rate." }).optional(),
  anchor: instant({ about: "A time of a sample." }).optional(),
  forgive: truth({ default: false, about: "Go on." }),
});

const smooth = stageSettings("smooth", {
  points: count({ min: 1, max: 99, about: "Number of samples." }).optional(),
  over: durationOr(["whole"], { default: "whole", about: "Length." }),
  share: percent({ min: 0.01, max: 1, default: "100 %", about: "Share." }),
  drift: ppm({ min: -1000, max: 1000, about: "Drift of the clock." }).optional(),
  slope: rateOfChange({ about: "Steepest change." }).optional(),
  weights: list(finite({ about: "A weight." }), { min: 1, max: 5, about: "Weights." }).optional(),
  spike: strictObject(
    { over: duration({ about: "Length." }), deviations: finite({ min: 0, about: "How many." }) },
    "What counts as a spike.",
  ).optional(),
});

const cut = stageSettings("cut", {
  shape: oneOf(["low-pass", "high-pass"], { about: "What passes." }),
  pass: list(frequency({ about: "An edge." }), { min: 1, max: 2, single: true, about: "Edges." }).optional(),
  floor: decibels({ min: -200, max: 0, default: "-60 dB", about: "Limit." }),
  to: durationOrRate({ about: "New interval or rate." }).optional(),
});

const tell = stageSettings("tell", {
  bands: record(
    strictObject({ from: frequency({ zero: true, about: "Lower." }), to: frequency({ about: "Upper." }) }),
    { about: "Bands." },
  ).optional(),
});

const ABOUT = "A stage of the tests.";

export const FAKE_STAGES: StageSchemas = new Map(
  Object.entries({ even, smooth, cut, tell }).map(([name, settings]): [string, StageSchema] => [
    name,
    { name, about: ABOUT, settings },
  ]),
);
