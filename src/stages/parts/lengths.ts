/** Checks that several stages share: lengths of time that must be a whole number of intervals. */
import type { Duration } from "../../pipeline/quantities.ts";
import { type Grid, intervalSeconds } from "../../signal/grid.ts";
import type { Problem, Signal } from "../stage.ts";

/** A length of time as a number of samples, or undefined with a problem when it is not a whole number. */
export function windowPoints(
  length: Duration,
  grid: Grid,
  path: readonly (string | number)[],
  most: number,
  problems: Problem[],
): number | undefined {
  // length / interval, exactly: (num/den) / (stride * halfNum / halfDen)
  const top = BigInt(length.us.num) * BigInt(grid.halfDen);
  const bottom = BigInt(length.us.den) * BigInt(grid.stride) * BigInt(grid.halfNum);
  const interval = intervalSeconds(grid);
  const below = Number(top / bottom);
  if (top % bottom !== 0n || below < 1) {
    const near = Math.max(1, below);
    problems.push({
      code: "not-whole-intervals",
      severity: "error",
      path,
      problem: "the length is not a whole number of sample intervals",
      given: `${length.text}, with a sample interval of ${seconds(interval)}`,
      allowed: `a multiple of ${seconds(interval)}`,
      todo: `write ${seconds(near * interval)} or ${seconds((near + 1) * interval)}`,
    });
    return undefined;
  }
  if (below > most) {
    problems.push({
      code: "window-too-long",
      severity: "error",
      path,
      problem: "the length holds too many samples",
      given: `${length.text} = ${below} samples`,
      allowed: `at most ${most} samples`,
      todo: "decimate first, and go on at the lower rate",
    });
    return undefined;
  }
  return below;
}

/** An even centred window moves the grid, so it cannot act on some channels only. */
export function unevenSelection(
  signal: Signal,
  selected: readonly number[],
  n: number,
  problems: Problem[],
): void {
  if (selected.length === signal.channels.length) return;
  problems.push({
    code: "even-length-on-some-channels",
    severity: "error",
    path: ["channels"],
    problem:
      "a centred window of even length moves the grid by half an interval, so all channels must pass it",
    given: `${n} points on ${selected.length} of ${signal.channels.length} channels`,
    allowed: "an odd number of points, or all channels",
    todo: `use ${n + 1} points`,
  });
}

const seconds = (s: number): string => `${Number(s.toPrecision(9))} s`;
