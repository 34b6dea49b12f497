/**
 * Runs the chain over the spooled rows of one series: first the passes of stages that must see the record
 * before they can work, then the pass that measures and writes.
 */

import type { RowBlock } from "../logs/rows.ts";
import type { Plan } from "../pipeline/plan-types.ts";
import { firstIndexAtOrAfter, lastIndexAtOrBefore } from "../signal/grid.ts";
import { ChannelChain, lagSamples, type StageMeasure, type WholeMeasure } from "./channel-chain.ts";
import { ChannelZip, type RowsOut } from "./channel-zip.ts";
import type { StateCounts } from "./counts.ts";
import { indexRange } from "./index-range.ts";
import { RemovedSeries } from "./removed-series.ts";
import { RowChain, type RowMeasure } from "./row-chain.ts";
import type { Scope } from "./scope.ts";
import { SpectrumPlans } from "./spectrum-plans.ts";
import { Extremes } from "./sums.ts";
import { TimeStrip } from "./time-strip.ts";

/** Rows that can be read from the start again and again. */
export interface Rows {
  readonly rows: number;
  readonly first_us: number;
  readonly last_us: number;
  blocks(): Iterable<RowBlock>;
}

export interface RunOptions {
  readonly plan: Plan;
  readonly rows: Rows;
  readonly scope: Scope;
  readonly onClean: RowsOut;
  /** Places in plan.stages whose output is marked suspect. */
  readonly suspect?: ReadonlySet<number>;
  /** Where given, the removed series is made as well. */
  readonly onRemoved?: RowsOut;
  /** Called as rows go by: share of all passes done, 0 to 1. */
  readonly onProgress?: (share: number) => void;
}

/** What was measured of one channel. */
export interface ChannelResult {
  readonly rowMeasures: readonly RowMeasure[];
  readonly measures: readonly StageMeasure[];
  readonly whole: WholeMeasure | null;
  readonly gridCounts: StateCounts;
  readonly interpolation: Record<string, unknown>;
  readonly inputStrip: TimeStrip;
  readonly cleanStrip: TimeStrip;
  readonly inputExtremes: Extremes;
  /** What stages learned on a first pass, by place in plan.stages. */
  readonly learned: ReadonlyMap<number, unknown>;
}

/** Whether the removed series is possible: the whole-sample lag up to the first drop, or null where odd halves stand in the way. */
export function removedLag(plan: Plan, channel: number): number | null {
  let lag = 0;
  for (const planned of plan.stages) {
    if (planned.selected.includes(channel)) lag += lagSamples(planned);
    if (planned.design.keepEvery > 1) break;
  }
  return Math.abs(lag - Math.round(lag)) < 1e-9 ? Math.round(lag) : null;
}

export function runChain(options: RunOptions): ChannelResult[] {
  const { plan, rows, scope } = options;
  const grid = plan.gridStage.design.grid;
  const learned = plan.channels.map(() => new Map<number, unknown>());
  const lessons = plan.stages.flatMap((s, i) => (s.design.learn === undefined ? [] : [i]));
  const passes = lessons.length + 1;
  let pass = 0;
  const drive = (chains: readonly (ChannelChain | null)[]) => {
    let seen = 0;
    const rowChain =
      plan.rowStages.length === 0
        ? null
        : new RowChain(plan.rowStages, plan.channels.length, (block) => {
            for (const [c, chain] of chains.entries())
              chain?.push(block.times, block.columns[c]!, block.count, block.marks[c]!);
          });
    for (const block of rows.blocks()) {
      if (rowChain === null)
        for (const [c, chain] of chains.entries()) chain?.push(block.times, block.columns[c]!, block.count);
      else rowChain.push(block);
      seen += block.count;
      options.onProgress?.((pass + seen / rows.rows) / passes);
    }
    rowChain?.flush();
    for (const chain of chains) chain?.flush();
    pass++;
    return rowChain;
  };

  for (const depth of lessons) {
    const { design, selected, signalIn } = plan.stages[depth]!;
    const at = signalIn.grid!;
    const within = {
      first: firstIndexAtOrAfter(at, rows.first_us),
      last: lastIndexAtOrBefore(at, rows.last_us),
    };
    const learners = plan.channels.map((_, c) => (selected.includes(c) ? design.learn!(within) : null));
    const chains = learners.map((learner, channel) =>
      learner === null
        ? null
        : new ChannelChain({
            plan,
            channel,
            scope,
            learned: learned[channel]!,
            depth,
            sink: (b) => learner.push(b),
          }),
    );
    drive(chains);
    learners.forEach((learner, c) => {
      if (learner !== null) learned[c]!.set(depth, learner.finish());
    });
  }

  const span: Scope = {
    from_us: Math.max(rows.first_us, scope.from_us),
    until_us: Math.min(rows.last_us, scope.until_us),
  };
  const spectra = new SpectrumPlans(plan.report, span);
  const gridRange = indexRange(grid, scope);
  const outRange = indexRange(plan.outGrid, scope);
  const clean = new ChannelZip(plan.channels.length, outRange, options.onClean);
  const removed =
    options.onRemoved === undefined
      ? null
      : new ChannelZip(plan.channels.length, gridRange, options.onRemoved);
  const results: ChannelResult[] = [];
  let rowChain: RowChain | null = null;
  const chains = plan.channels.map((_, channel) => {
    const inputStrip = new TimeStrip(gridRange);
    const cleanStrip = new TimeStrip(outRange);
    const inputExtremes = new Extremes();
    const pair =
      removed === null ? null : new RemovedSeries(removedLag(plan, channel) ?? 0, removed.sink(channel));
    const cleanSink = clean.sink(channel);
    const chain = new ChannelChain({
      plan,
      channel,
      scope,
      learned: learned[channel]!,
      spectra,
      onGrid: (block) => {
        inputStrip.push(block);
        pair?.pushInput(block);
        inputExtremes.addBlock(block, gridRange);
      },
      sink: (block) => {
        cleanStrip.push(block);
        cleanSink(block);
      },
      ...(options.suspect === undefined ? {} : { suspect: options.suspect }),
      ...(pair === null ? {} : { onBeforeDrop: pair.pushOutput }),
    });
    results.push({
      get rowMeasures() {
        return rowChain?.measures(channel) ?? [];
      },
      measures: chain.measures,
      whole: chain.whole,
      gridCounts: chain.gridCounts,
      get interpolation() {
        return chain.interpolationEffect();
      },
      inputStrip,
      cleanStrip,
      inputExtremes,
      learned: learned[channel]!,
    });
    return chain;
  });
  rowChain = drive(chains);
  clean.handOver();
  removed?.handOver();
  return results;
}

/** Places in plan.stages whose alias limit does not hold on the data of any channel. */
export function brokenAliasLimits(plan: Plan, results: readonly ChannelResult[]): ReadonlySet<number> {
  const broken = new Set<number>();
  plan.stages.forEach((planned, i) => {
    const limit = planned.design.alias?.limit_dB;
    if (limit === undefined) return;
    for (const result of results) {
      const ratio = result.measures[i]!.alias?.measure()?.ratio_dB;
      if (ratio !== undefined && ratio > limit) broken.add(i);
    }
  });
  return broken;
}
