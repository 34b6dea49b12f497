/** A case at work: its chain planned at a rate, records for it, and its kernel fed directly. */

import type { Plan, PlannedStage } from "../../../src/pipeline/plan-types.ts";
import { timeOf } from "../../../src/signal/grid.ts";
import type { GridBlock } from "../../../src/signal/grid-block.ts";
import { MISSING } from "../../../src/signal/marks.ts";
import { type Entry, planOf, type Record0, run } from "../../engine/harness.ts";
import type { StageCase } from "./cases.ts";
import { gridEntry, type Rate } from "./rates.ts";

export interface AtWork {
  readonly plan: Plan;
  /** The stage under test. */
  readonly planned: PlannedStage;
  /** Its place in plan.stages; -1 for the grid stage. */
  readonly place: number;
}

const planned = new Map<string, AtWork>();

/**
 * Designs take time, so each is made once.
 * @param joined  rows farther apart than this many intervals are not joined
 */
export function atWork(c: StageCase, rate: Rate, joined = 1.5, below: readonly Entry[] = []): AtWork {
  const key = `${c.stage} ${c.name} ${rate.name} ${joined} ${below.length}`;
  const made = planned.get(key) ?? makeAtWork(c, rate, joined, below);
  planned.set(key, made);
  return made;
}

function makeAtWork(c: StageCase, rate: Rate, joined: number, below: readonly Entry[]): AtWork {
  const settings = c.settings(rate);
  const chain: Entry[] =
    c.stage === "resample"
      ? [gridEntry(rate, joined, settings), ...below]
      : [gridEntry(rate, joined), ...(c.above ?? []), { stage: c.stage, ...settings }, ...below];
  const plan = planOf(chain);
  const place = c.stage === "resample" ? -1 : (c.above?.length ?? 0);
  return { plan, place, planned: place < 0 ? plan.gridStage : plan.stages[place]! };
}

/** Samples of the grid before and after an output's time on which it rests, over the stages of the chain. */
export function chainReach(c: StageCase, plan: Plan): { before: number; after: number } {
  const half = c.stage === "resample" ? (c.window! - 1) / 2 : 0;
  const sum = { before: half, after: half };
  for (const { design } of plan.stages) {
    sum.before += design.reach?.before ?? Number.POSITIVE_INFINITY;
    sum.after += design.reach?.after ?? Number.POSITIVE_INFINITY;
  }
  return sum;
}

/** Rows on the grid times of `first`, `first` + 1, …; NaN is a row whose cell is empty, undefined no row at all. */
export function rowsOnGrid(plan: Plan, first: number, values: ArrayLike<number | undefined>): Record0 {
  const grid = plan.gridStage.design.grid;
  const times: number[] = [];
  const column: number[] = [];
  for (let i = 0; i < values.length; i++) {
    const v = values[i];
    if (v === undefined) continue;
    times.push(timeOf(grid, first + i));
    column.push(v);
  }
  return { times, columns: [column] };
}

/** Waves, a drift, empty cells, lost rows and a long gap, then room for a long window; the same every time. */
export function roughValues(n: number): (number | undefined)[] {
  return Array.from({ length: n }, (_, i) => {
    const early = i < 500;
    if ((early && i % 97 === 40) || (i >= 300 && i < 500) || i === 900) return undefined;
    return early && i % 131 === 60 ? Number.NaN : 5 + 0.01 * i + Math.sin(i / 9) + 0.3 * Math.sin(i * 2.1);
  });
}

export interface Series {
  readonly first: number;
  readonly values: readonly number[];
  readonly marks: readonly number[];
}

/** The clean series of one channel; empty when nothing came out. */
export function cleanOf(plan: Plan, record: Record0, blockRows?: number): Series {
  const ran = run(plan, record, blockRows === undefined ? {} : { blockRows });
  return { first: ran.first + 0, values: ran.clean[0]!, marks: ran.marks[0]! };
}

/** What the stage's kernel makes of one uninterrupted stretch at full rate, index by index. */
export function throughKernel(
  planned: PlannedStage,
  first: number,
  x: Float64Array,
  fullRate = true,
): { first: number; y: Float64Array } {
  const out: GridBlock[] = [];
  const kernel = planned.design.kernel({ fullRate });
  const marks = Uint8Array.from(x, (v) => (Number.isNaN(v) ? MISSING : 0));
  kernel.push({ first, values: x, marks }, (b) => out.push(b));
  kernel.flush((b) => out.push(b));
  return { first: out[0]?.first ?? Number.NaN, y: Float64Array.from(out.flatMap((b) => [...b.values])) };
}

/** By how many of the input's intervals the output's grid lies later, on equal indices at full rate. */
export function gridShift(planned: PlannedStage): number {
  const { grid } = planned.signalIn;
  return grid === null ? 0 : (planned.design.grid.offset - grid.offset) / grid.stride;
}
