/** Row stages at work in memory, for tests. */
import { RowChain } from "../../src/engine/row-chain.ts";
import { RowSpool } from "../../src/logs/row-spool.ts";
import type { PlannedRowStage } from "../../src/pipeline/plan-types.ts";
import { STAGES } from "../../src/stages/registry.ts";
import type { AnyDesign, Problem, RowEffect, RowStageDesign, Signal } from "../../src/stages/stage.ts";

export interface RowsIn {
  readonly times: readonly number[];
  readonly columns: readonly (readonly number[])[];
}

export interface RowsOut {
  readonly times: number[];
  readonly columns: number[][];
  readonly marks: number[][];
  readonly effects: RowEffect[];
}

const signalOf = (units: readonly string[]): Signal => ({
  grid: null,
  channels: units.map((unit, c) => ({ name: "abcdef"[c]!, unit })),
  filters: units.map(() => []),
  finest_s: null,
});

/** Designs a stage by itself, for channels a, b, c … with these units. */
export function designOf(
  stage: string,
  settings: Record<string, unknown>,
  units: readonly string[] = ["m"],
  selected: readonly number[] = units.map((_, c) => c),
): { design: RowStageDesign | null; problems: readonly Problem[] } {
  const { settings: schema, design } = STAGES.get(stage)!;
  const outcome = design(schema.parse(settings), signalOf(units), selected);
  return { design: outcome.design as (AnyDesign & RowStageDesign) | null, problems: outcome.problems };
}

export const codesOf = (...args: Parameters<typeof designOf>): string[] =>
  designOf(...args).problems.map((p) => p.code);

/** Runs rows through one stage. */
export function through(
  stage: string,
  settings: Record<string, unknown>,
  rows: RowsIn,
  options: { blockRows?: number; selected?: readonly number[]; units?: readonly string[] } = {},
): RowsOut {
  const units = options.units ?? rows.columns.map(() => "m");
  const selected = options.selected ?? units.map((_, c) => c);
  const { design, problems } = designOf(stage, settings, units, selected);
  if (design === null) throw new Error(problems.map((p) => p.problem).join("; "));
  const planned: PlannedRowStage = { place: 1, stage, signalIn: signalOf(units), design, selected };
  const out = {
    times: [] as number[],
    columns: units.map(() => [] as number[]),
    marks: units.map(() => [] as number[]),
  };
  const chain = new RowChain([planned], units.length, (block) => {
    out.times.push(...block.times.subarray(0, block.count));
    for (let c = 0; c < units.length; c++) {
      out.columns[c]!.push(...block.columns[c]!.subarray(0, block.count));
      out.marks[c]!.push(...block.marks[c]!.subarray(0, block.count));
    }
  });
  const spool = new RowSpool(units.length, options.blockRows ?? 1000);
  spool.append({
    count: rows.times.length,
    times: Float64Array.from(rows.times),
    columns: rows.columns.map((c) => Float64Array.from(c)),
  });
  for (const block of spool.blocks()) chain.push(block);
  chain.flush();
  spool.close();
  return { ...out, effects: units.map((_, c) => chain.measures(c)[0]!.effect) };
}

/** One value a second. */
export const everySecond = (...columns: readonly (readonly number[])[]): RowsIn => ({
  times: columns[0]!.map((_, i) => i * 1e6),
  columns,
});

/** Places of the values that were kept out. */
export const rejectedAt = (out: RowsOut, channel = 0): number[] =>
  out.marks[channel]!.flatMap((mark, i) => ((mark & 32) !== 0 ? [i] : []));
