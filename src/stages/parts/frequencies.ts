import type { Frequency } from "../../pipeline/quantities.ts";

/** A frequency in Hz; cycles/sample are taken at the stage's own interval. */
export const inHertz = (f: Frequency, interval_s: number): number =>
  f.kind === "hertz" ? f.hz : f.value / interval_s;

/** A frequency in cycles/sample of the stage's own interval. */
export const inCyclesPerSample = (f: Frequency, interval_s: number): number =>
  f.kind === "hertz" ? f.hz * interval_s : f.value;
