/** `report`: accounts for every stage above it; the data pass unchanged. */
import type { z } from "zod";
import { count, frequency, oneOf, record, stageSettings, strictObject, truth } from "../pipeline/kinds.ts";
import { intervalSeconds } from "../signal/grid.ts";
import { passOn } from "../signal/grid-block.ts";
import { inHertz } from "./parts/frequencies.ts";
import type { DesignOutcome, Problem, ReportDesign, Signal, Stage } from "./stage.ts";

const FINEST_SEGMENT = 2 ** 18;

const settings = stageSettings("report", {
  resolution: frequency({
    about:
      "Bin spacing of the spectra, met or bettered by a power of two; by default the record's length decides.",
  }).optional(),
  window: oneOf(["hann", "hamming", "blackman", "rectangular"], {
    default: "hann",
    about: "Window of each spectrum segment; segments overlap by half.",
  }),
  bands: record(
    strictObject({
      from: frequency({ zero: true, about: "Lower limit." }),
      to: frequency({ about: "Upper limit." }),
    }),
    { about: "Named bands whose power is accounted for before, after and removed." },
  ).optional(),
  "third-octaves": truth({
    default: false,
    about: "Account for one-third octaves too (IEC 61260-1, base-ten centres), from two bins' width up.",
  }),
  tones: count({ min: 0, max: 50, default: 5, about: "How many of the strongest tones are listed." }),
});
type Settings = z.output<typeof settings>;

function design(s: Settings, signal: Signal, _selected: readonly number[]): DesignOutcome<ReportDesign> {
  const grid = signal.grid!;
  const interval = intervalSeconds(grid);
  const problems: Problem[] = [];
  const resolution_Hz = s.resolution === undefined ? null : inHertz(s.resolution, interval);
  if (resolution_Hz !== null && 1 / (resolution_Hz * signal.finest_s!) > FINEST_SEGMENT)
    problems.push({
      code: "resolution-too-fine",
      severity: "error",
      path: ["resolution"],
      problem: "segments of this resolution would hold too many samples at the first rate of the chain",
      given: `${resolution_Hz} Hz at an interval of ${signal.finest_s} s`,
      allowed: `at least ${1 / (FINEST_SEGMENT * signal.finest_s!)} Hz`,
      todo: "ask for a coarser resolution",
    });
  const bands = Object.entries(s.bands ?? {}).map(([name, band]) => {
    const from_Hz = inHertz(band.from, interval);
    const to_Hz = inHertz(band.to, interval);
    if (!(to_Hz > from_Hz))
      problems.push({
        code: "empty-band",
        severity: "error",
        path: ["bands", name],
        problem: `band ${name} is empty`,
        given: `${from_Hz} Hz to ${to_Hz} Hz`,
        allowed: "to above from",
        todo: "swap them, or correct a unit",
      });
    return { name, from_Hz, to_Hz };
  });
  if (problems.some((p) => p.severity === "error")) return { design: null, problems };
  return {
    problems,
    design: {
      grid,
      says: "Accounted for every stage above; the data pass unchanged.",
      settings: {
        resolution_Hz: resolution_Hz ?? "by record length",
        window: s.window,
        bands: Object.fromEntries(bands.map((b) => [b.name, { from_Hz: b.from_Hz, to_Hz: b.to_Hz }])),
        "third-octaves": s["third-octaves"],
        tones: s.tones,
      },
      taps: null,
      delay: { samples: 0, indexSamples: 0, compensated_s: 0 },
      reach: { before: 0, after: 0 },
      end_s: 0,
      keepEvery: 1,
      alias: null,
      notes: {},
      kernel: passOn,
      report: { resolution_Hz, window: s.window, bands, tones: s.tones, thirdOctaves: s["third-octaves"] },
    },
  };
}

export const report: Stage<typeof settings> = {
  name: "report",
  about: "Records what every stage above it removed and how late its result is; the data pass unchanged.",
  settings,
  design,
};
