/** Edges of a filter as settings, and the problems they can have. */
import type { Frequency } from "../../pipeline/quantities.ts";
import type { FilterShape } from "../../signal/windowed-sinc.ts";
import type { Problem } from "../stage.ts";
import { inCyclesPerSample } from "./frequencies.ts";

/** The one or two edges that a shape needs, inside (0, 0.5) cycles/sample and rising. */
export function edges(
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
export function inOrder(
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

export function missing(key: string, what: string): Problem {
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

export const hertz = (f: number): string => `${Number(f.toPrecision(4))} Hz`;
