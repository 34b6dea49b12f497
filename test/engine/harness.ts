/** Runs a chain over rows in memory, without files: for tests of the engine and of stages. */
import { type ChannelResult, type RunOptions, runChain } from "../../src/engine/run-chain.ts";
import { WHOLE_RECORD } from "../../src/engine/scope.ts";
import { RowSpool } from "../../src/logs/row-spool.ts";
import type { LoadedPipeline } from "../../src/pipeline/load.ts";
import { planPipeline } from "../../src/pipeline/plan.ts";
import type { Plan } from "../../src/pipeline/plan-types.ts";
import { STAGES } from "../../src/stages/registry.ts";

export type Entry = { stage: string; channels?: string[] } & Record<string, unknown>;

/** Plans a chain given as the pipeline file would give it. */
export function planOf(chain: readonly Entry[], channels: readonly string[] = ["x"]): Plan {
  const loaded = {
    pipeline: {
      channels: channels.map((name) => ({ name, column: name, unit: "m" })),
      chain: chain.map(({ stage, ...settings }, index) => ({
        stage,
        settings: STAGES.get(stage)!.settings.parse(settings),
        channels: settings.channels,
        index,
      })),
    },
    shownName: "test.yaml",
    at: () => ({ line: 1, column: 1 }),
  } as unknown as LoadedPipeline;
  return planPipeline(loaded, STAGES).plan;
}

export interface Ran {
  readonly results: ChannelResult[];
  /** Grid index of the first row of each series. */
  readonly first: number;
  readonly clean: number[][];
  readonly marks: number[][];
  readonly removedFirst: number;
  readonly removed: number[][];
}

export interface Record0 {
  readonly times: ArrayLike<number>;
  readonly columns: readonly ArrayLike<number>[];
}

/** Rows at exact multiples of the interval from `from_us` on. */
export function evenRows(values: ArrayLike<number>, interval_us: number, from_us = 0): Record0 {
  return { times: Array.from(values, (_, i) => from_us + i * interval_us), columns: [values] };
}

export function run(
  plan: Plan,
  record: Record0,
  options: { blockRows?: number; removed?: boolean } & Partial<RunOptions> = {},
): Ran {
  const spool = new RowSpool(plan.channels.length, options.blockRows ?? 8192);
  spool.append({
    count: record.times.length,
    times: Float64Array.from(record.times),
    columns: record.columns.map((c) => Float64Array.from(c)),
  });
  const gather = () => ({
    first: Number.NaN,
    values: plan.channels.map(() => [] as number[]),
    marks: plan.channels.map(() => [] as number[]),
  });
  const clean = gather();
  const removed = gather();
  const into =
    (to: ReturnType<typeof gather>): RunOptions["onClean"] =>
    (first, count, values, marks) => {
      if (Number.isNaN(to.first)) to.first = first;
      for (let c = 0; c < values.length; c++)
        for (let i = 0; i < count; i++) {
          to.values[c]!.push(values[c]![i]!);
          to.marks[c]!.push(marks[c]![i]!);
        }
    };
  const results = runChain({
    plan,
    rows: spool,
    scope: WHOLE_RECORD,
    ...options,
    onClean: into(clean),
    ...(options.removed === true ? { onRemoved: into(removed) } : {}),
  });
  spool.close();
  return {
    results,
    first: clean.first,
    clean: clean.values,
    marks: clean.marks,
    removedFirst: removed.first,
    removed: removed.values,
  };
}
