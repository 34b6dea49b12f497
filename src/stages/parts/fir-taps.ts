import type { Frequency } from "../../pipeline/quantities.ts";
import { DesignError } from "../../signal/design-error.ts";
import { groupDelayOf } from "../../signal/response.ts";
import { designBySpecification } from "../../signal/specification.ts";
import { designWindowedSinc, type FilterShape } from "../../signal/windowed-sinc.ts";
import type { FirSettings } from "../fir.ts";
import type { Problem } from "../stage.ts";
import { inCyclesPerSample } from "./frequencies.ts";

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

/** Settings of each of the three ways to say what the filter is; those not named belong to all. */
const WAYS = {
  specification: ["pass", "stop", "ripple", "attenuation"],
  size: ["taps", "edge", "window", "beta"],
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
      allowed: "pass and stop (with ripple, attenuation); or taps, edge and window; or coefficients",
      todo: "choose one of the three",
    });
    return null;
  }
  try {
    if (s.coefficients !== undefined) return given(s.coefficients);
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

function given(coefficients: readonly number[]): ChosenTaps {
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
  const made = designBySpecification({
    shape,
    pass,
    stop,
    ripple_dB,
    attenuation_dB,
    method: "windowed-sinc",
    parity: "odd",
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

/** The one or two edges that a shape needs, inside (0, 0.5) cycles/sample and rising. */
function edges(
  list: readonly Frequency[] | undefined,
  key: "pass" | "stop" | "edge",
  shape: FilterShape,
  interval_s: number,
  problems: Problem[],
): number[] | null {
  const wanted = shape === "low-pass" || shape === "high-pass" ? 1 : 2;
  if (list === undefined) {
    problems.push(missing(key, wanted === 1 ? "a frequency" : "two frequencies"));
    return null;
  }
  if (list.length !== wanted) {
    problems.push({
      code: "edge-count",
      severity: "error",
      path: [key],
      problem: `a ${shape} filter has ${wanted === 1 ? "one edge" : "two edges"} here`,
      given: `${list.length}`,
      allowed: `${wanted}`,
      todo: wanted === 1 ? "give one frequency" : "give a list of two, lower one first",
    });
    return null;
  }
  const nyquist = 0.5 / interval_s;
  let ok = true;
  const values = list.map((f, i) => {
    const value = inCyclesPerSample(f, interval_s);
    if (!(value > 0 && value < 0.5)) {
      ok = false;
      problems.push({
        code: "edge-above-nyquist",
        severity: "error",
        path: list.length > 1 ? [key, i] : [key],
        problem: value > 0 ? "the edge is not below the Nyquist frequency" : "the edge must be above zero",
        given: `${f.text} = ${hertz(value / interval_s)}, with a sample interval of ${interval_s} s`,
        allowed: `above 0 and below ${hertz(nyquist)}`,
        todo: "lower the edge, or filter before the rate is lowered",
      });
    }
    return value;
  });
  if (ok && values.length === 2 && !(values[0]! < values[1]!)) {
    ok = false;
    problems.push({
      code: "edge-order",
      severity: "error",
      path: [key],
      problem: "the two edges must rise",
      given: list.map((f) => f.text).join(", "),
      allowed: "lower edge first",
      todo: "swap them",
    });
  }
  return ok ? values : null;
}

/** Passband and stopband must not overlap. */
function inOrder(
  shape: FilterShape,
  pass: readonly number[],
  stop: readonly number[],
  interval_s: number,
  problems: Problem[],
): boolean {
  const [p0, p1] = pass as [number, number];
  const [s0, s1] = stop as [number, number];
  const fine = {
    "low-pass": p0 < s0,
    "high-pass": s0 < p0,
    "band-pass": s0 < p0 && p1 < s1,
    "band-stop": p0 < s0 && s1 < p1,
  }[shape];
  if (fine) return true;
  const text = (list: readonly number[]) => list.map((f) => hertz(f / interval_s)).join(", ");
  problems.push({
    code: "bands-overlap",
    severity: "error",
    path: ["stop"],
    problem: `passband and stopband of a ${shape} filter overlap`,
    given: `pass ${text(pass)}; stop ${text(stop)}`,
    allowed: {
      "low-pass": "pass below stop",
      "high-pass": "stop below pass",
      "band-pass": "stop, pass, pass, stop in rising order",
      "band-stop": "pass, stop, stop, pass in rising order",
    }[shape],
    todo: "swap the edges, or change the shape",
  });
  return false;
}

function missing(key: string, what: string): Problem {
  return {
    code: "missing-setting",
    severity: "error",
    path: [],
    problem: `${key} is missing`,
    given: `no ${key}`,
    allowed: what,
    todo: `add ${key}`,
  };
}

const hertz = (f: number): string => `${Number(f.toPrecision(4))} Hz`;
