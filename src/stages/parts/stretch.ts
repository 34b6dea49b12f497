/** The stretch of time that a row stage works on: `from` belongs to it, `until` does not. */
import { instant } from "../../pipeline/kinds.ts";
import type { Instant } from "../../pipeline/quantities.ts";
import type { Problem } from "../stage.ts";

export interface Stretch {
  readonly from_us: number;
  readonly until_us: number;
}

export const stretchSettings = {
  from: instant({
    about: "Rows before this time are left alone; from the first row when left out.",
  }).optional(),
  until: instant({
    about: "Rows from this time on are left alone; to the last row when left out.",
  }).optional(),
};

interface Given {
  readonly from?: Instant | undefined;
  readonly until?: Instant | undefined;
}

export function stretchOf(s: Given, problems: Problem[]): Stretch {
  const stretch = {
    from_us: s.from?.us ?? Number.NEGATIVE_INFINITY,
    until_us: s.until?.us ?? Number.POSITIVE_INFINITY,
  };
  if (!(stretch.from_us < stretch.until_us))
    problems.push({
      code: "empty-stretch",
      severity: "error",
      path: ["until"],
      problem: "the stretch of time is empty",
      given: `from ${s.from!.text} until ${s.until!.text}`,
      allowed: "until after from",
      todo: "swap them, or correct one of them",
    });
  return stretch;
}

/** For sentences: ` from … until …`, or nothing where the whole record is meant. */
export const stretchText = (s: Given): string =>
  `${s.from === undefined ? "" : ` from ${s.from.text}`}${s.until === undefined ? "" : ` until ${s.until.text}`}`;
