/** The taps of a fir stage, in whichever way its settings describe them. */
import { DesignError } from "../../signal/design-error.ts";
import { groupDelayOf } from "../../signal/response.ts";
import { designBySpecification } from "../../signal/specification.ts";
import { designWindowedSinc, type FilterShape } from "../../signal/windowed-sinc.ts";
import type { FirSettings } from "../fir.ts";
import type { Problem } from "../stage.ts";
import { byBands, savitzkyGolay, wrongMethod } from "./fir-bands.ts";
import { edges, hertz, inOrder, missing } from "./fir-edges.ts";

export interface ChosenTaps {
  /** In order of convolution. */
  readonly taps: Float64Array;
  readonly says: string;
  readonly settings: Record<string, unknown>;
  readonly notes: Record<string, unknown>;
  /** Group delay in samples, where the taps are not symmetric: at the lowest passband frequency. */
  readonly delay: number;
}

const DEFAULT_RIPPLE_dB = 0.1;
const DEFAULT_ATTENUATION_dB = 60;
const PASSES: Record<FilterShape, string> = {
  "low-pass": "Kept what is slower than",
  "high-pass": "Kept what is faster than",
  "band-pass": "Kept what lies between",
  "band-stop": "Took out what lies between",
};

/** Settings that say in which way the filter is described. */
const WAYS = {
  specification: ["pass", "stop", "ripple", "attenuation"],
  size: ["taps", "edge", "window", "beta", "bands", "degree"],
  given: ["coefficients"],
} as const;

/** The taps that the settings ask for, or null with problems. */
export function chooseTaps(s: FirSettings, interval_s: number, problems: Problem[]): ChosenTaps | null {
  const ways = (Object.keys(WAYS) as (keyof typeof WAYS)[]).filter((way) =>
    WAYS[way].some((key) => s[key] !== undefined),
  );
  if (ways.length !== 1) {
    const used = Object.values(WAYS)
      .flat()
      .filter((key) => s[key] !== undefined);
    problems.push({
      code: "fir-way",
      severity: "error",
      path: [],
      problem:
        ways.length === 0 ? "the filter is not described" : "the filter is described in more than one way",
      given: used.length === 0 ? "none of pass and stop, taps, coefficients" : used.join(", "),
      allowed:
        "pass and stop (with ripple, attenuation); or taps with edge, bands or degree; or coefficients",
      todo: "choose one of the three",
    });
    return null;
  }
  try {
    if (s.coefficients !== undefined) return given(s.coefficients, problems);
    if (ways[0] === "size" && s.method === "savitzky-golay") return savitzkyGolay(s, problems);
    if (ways[0] === "size" && s.bands !== undefined) return byBands(s, s.bands, interval_s, problems);
    if (s.shape === undefined) {
      problems.push(missing("shape", "low-pass, high-pass, band-pass or band-stop"));
      return null;
    }
    return ways[0] === "specification"
      ? bySpecification(s, s.shape, interval_s, problems)
      : bySize(s, s.shape, interval_s, problems);
  } catch (error) {
    if (!(error instanceof DesignError)) throw error;
    problems.push({
      code: "no-filter",
      severity: "error",
      path: [],
      problem: error.problem,
      given: error.given,
      allowed: error.allowed,
      todo: error.todo,
    });
    return null;
  }
}

function given(coefficients: readonly number[], problems: Problem[]): ChosenTaps | null {
  if (coefficients.every((w) => w === 0)) {
    problems.push({
      code: "nothing-passes",
      severity: "error",
      path: ["coefficients"],
      problem: "taps that are all zero let nothing pass",
      given: `${coefficients.length} zeros`,
      allowed: "at least one tap other than zero",
      todo: "give the filter's taps, or take the stage out",
    });
    return null;
  }
  const taps = Float64Array.from(coefficients);
  const delay = groupDelayOf(taps);
  return {
    taps,
    says: "Filtered with the taps given:",
    settings: { coefficients: "given" },
    notes: delay.constant
      ? {}
      : { group_delay_lowest_samples: delay.lowest, group_delay_highest_samples: delay.highest },
    delay: delay.samples,
  };
}

function bySpecification(
  s: FirSettings,
  shape: FilterShape,
  interval_s: number,
  problems: Problem[],
): ChosenTaps | null {
  const pass = edges(s.pass, "pass", shape, interval_s, problems);
  const stop = edges(s.stop, "stop", shape, interval_s, problems);
  if (pass === null || stop === null || !inOrder(shape, pass, stop, interval_s, problems)) return null;
  const ripple_dB = s.ripple ?? DEFAULT_RIPPLE_dB;
  const attenuation_dB = s.attenuation ?? DEFAULT_ATTENUATION_dB;
  if (s.method === "savitzky-golay") {
    problems.push(wrongMethod(s, "auto, windowed-sinc, equiripple, least-squares", "take method out"));
    return null;
  }
  const made = designBySpecification({
    shape,
    pass,
    stop,
    ripple_dB,
    attenuation_dB,
    method: s.method,
    parity: "odd",
  });
  if (made.warning !== undefined)
    problems.push({
      code: "free-band-peak",
      severity: "warning",
      path: ["method"],
      problem: made.warning,
      given: s.method,
      allowed: "any; what lies there is amplified",
      todo: "set method: auto or windowed-sinc, or make the transitions equally wide",
    });
  const hz = (f: number) => f / interval_s;
  return {
    taps: made.taps,
    says: `${PASSES[shape]} ${(shape === "band-stop" ? stop : pass).map((f) => hertz(hz(f))).join(" and ")}:`,
    settings: {
      shape,
      pass_Hz: pass.map(hz),
      stop_Hz: stop.map(hz),
      ripple_dB,
      attenuation_dB,
      method: made.method,
      taps: made.taps.length,
      ...(made.beta === undefined ? {} : { beta: made.beta }),
    },
    notes: {
      designed_by: made.why,
      achieved_ripple_dB: made.achieved.ripple_dB,
      achieved_attenuation_dB: made.achieved.attenuation_dB,
    },
    delay: (made.taps.length - 1) / 2,
  };
}

function bySize(
  s: FirSettings,
  shape: FilterShape,
  interval_s: number,
  problems: Problem[],
): ChosenTaps | null {
  if (s.method !== "auto" && s.method !== "windowed-sinc")
    problems.push(
      wrongMethod(
        s,
        "auto, windowed-sinc",
        s.method === "savitzky-golay" ? "add degree" : "give bands, or pass and stop",
      ),
    );
  if (s.taps === undefined) problems.push(missing("taps", "a count"));
  const edge = edges(s.edge, "edge", shape, interval_s, problems);
  const window = s.window ?? "hamming";
  if ((s.beta !== undefined) !== (window === "kaiser"))
    problems.push({
      code: "kaiser-beta",
      severity: "error",
      path: [s.beta === undefined ? "window" : "beta"],
      problem: "beta belongs to the Kaiser window, and only to it",
      given: s.beta === undefined ? "window: kaiser without beta" : `beta with window: ${window}`,
      allowed: "window: kaiser with beta, or another window without",
      todo: s.beta === undefined ? "add beta, for instance 8.6" : "take beta out, or set window: kaiser",
    });
  if (s.taps === undefined || edge === null || problems.length > 0) return null;
  const taps = designWindowedSinc({
    taps: s.taps,
    shape,
    edges: edge,
    window,
    ...(s.beta === undefined ? {} : { beta: s.beta }),
  });
  return {
    taps,
    says: `${PASSES[shape]} ${edge.map((f) => hertz(f / interval_s)).join(" and ")} (-6 dB):`,
    settings: {
      shape,
      taps: s.taps,
      edge_Hz: edge.map((f) => f / interval_s),
      window,
      ...(s.beta === undefined ? {} : { beta: s.beta }),
    },
    notes: {},
    delay: (s.taps - 1) / 2,
  };
}
