/** Which stage may stand where in the chain. */

import type { AnyStage, Problem, Signal } from "../stages/stage.ts";
import { isoInstant } from "./instant.ts";

/** Stages that spread a value over its neighbours. */
const SMOOTHS = new Set(["moving-average", "fir", "decimate"]);

/**
 * What stands in the wrong place of the chain.
 * @param above  names of the stages above it
 */
export function orderProblem(stage: AnyStage, signal: Signal, above: readonly string[]): Problem | null {
  const { name } = stage;
  const at = { severity: "error", path: ["stage"] } as const;
  if (stage.worksOn === "rows" && signal.grid !== null) {
    const smooth = above.filter((s) => SMOOTHS.has(s));
    return {
      ...at,
      code: "after-grid",
      problem:
        smooth.length === 0
          ? "this works on the rows as they were logged, and they are on an even grid already: each bad value has been blended with its neighbours"
          : `this works on the rows as they were logged, and ${smooth.join(" and ")} above it has spread each bad value over its whole window`,
      given: `${name} after ${above.join(", ")}`,
      allowed: `${name} before resample`,
      todo: `move ${name} above resample`,
    };
  }
  if (name === "resample" && signal.grid !== null)
    return {
      ...at,
      code: "second-grid",
      problem: "the rows are on an even grid already",
      given: "a second resample stage",
      allowed: "one resample stage, before every stage that smooths",
      todo: "take it out, or lower the rate with decimate",
    };
  if (name === "report" && above.includes("report"))
    return {
      ...at,
      code: "second-report",
      problem: "a chain has one report stage",
      given: "a second report stage",
      allowed: "one, which accounts for every stage above it",
      todo: "keep the last one",
    };
  if (stage.worksOn !== "rows" && name !== "resample" && signal.grid === null)
    return {
      ...at,
      code: "before-grid",
      problem: "this works on an even grid, and the rows are not on one yet",
      given: `${name} before resample`,
      allowed: "resample first",
      todo: "move resample above it",
    };
  return null;
}

/** A channel of which only some stretches have been converted has no one unit, so only calibrate can take it. */
export function conversionProblem(stage: AnyStage, signal: Signal): Problem | null {
  const half = signal.channels.find((c) => c.converting !== undefined);
  if (stage.name === "calibrate" || half === undefined) return null;
  const { unit, spans } = half.converting!;
  const stretch = spans.map(
    ({ from_us, until_us }) =>
      `${Number.isFinite(from_us) ? isoInstant(from_us) : "the start"} to ${Number.isFinite(until_us) ? isoInstant(until_us) : "the end"}`,
  );
  return {
    code: "half-calibrated",
    severity: "error",
    path: ["stage"],
    problem: `channel ${half.name} is in ${unit} for part of the time and in ${half.unit} for the rest`,
    given: `calibrated from ${stretch.join(" and from ")}`,
    allowed: "calibration of all times before any other stage",
    todo: `add a calibrate stage with unit: "${unit}" for the times left out`,
  };
}
