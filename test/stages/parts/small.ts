/** Short chains over a grid of 1 s, for what is particular to one stage. */
import type { Plan } from "../../../src/pipeline/plan-types.ts";
import { timeOf } from "../../../src/signal/grid.ts";
import { type Entry, planOf, run } from "../../engine/harness.ts";

export const SECONDS: Entry = { stage: "resample", interval: "1 s", "longest-gap": "1.5 s" };
/** The same, with single lost rows bridged and flagged. */
export const BRIDGED: Entry = { stage: "resample", interval: "1 s", "longest-gap": "2 s" };

export interface Clean {
  readonly plan: Plan;
  /** Times of the clean series, seconds. */
  readonly t: readonly number[];
  readonly y: readonly number[];
  readonly marks: readonly number[];
  readonly first: number;
}

/** One row a second from `first_s` on; NaN is an empty cell, undefined a lost row. */
export function clean(
  chain: readonly Entry[],
  values: ArrayLike<number | undefined>,
  first_s = 0,
  plan = planOf(chain),
): Clean {
  const times: number[] = [];
  const column: number[] = [];
  for (let i = 0; i < values.length; i++) {
    const v = values[i];
    if (v === undefined) continue;
    times.push((first_s + i) * 1e6);
    column.push(v);
  }
  const ran = run(plan, { times, columns: [column] });
  const y = ran.clean[0]!;
  return {
    plan,
    t: y.map((_, i) => timeOf(plan.outGrid, ran.first + i) / 1e6),
    y,
    marks: ran.marks[0]!,
    first: ran.first,
  };
}

/** The values that are there, by their time. */
export const present = ({ t, y }: Clean): [number, number][] =>
  y.flatMap((v, i): [number, number][] => (Number.isNaN(v) ? [] : [[t[i]!, v]]));

export const largest = (x: Iterable<number>): number =>
  Array.from(x).reduce((m, v) => Math.max(m, Math.abs(v)), 0);
