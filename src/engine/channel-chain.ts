import type { Plan, PlannedStage } from "../pipeline/plan-types.ts";
import { coarserGrid, type Grid } from "../signal/grid.ts";
import { type Emit, type GridBlock, type Kernel, keepEvery, passOn } from "../signal/grid-block.ts";
import { SUSPECT } from "../signal/marks.ts";
import { AliasSpectrum } from "./alias-spectrum.ts";
import { Comparison } from "./comparison.ts";
import { StateCounts } from "./counts.ts";
import { CrossSpectra } from "./cross-spectra.ts";
import { indexRange } from "./index-range.ts";
import { NodeSpectra } from "./node-spectra.ts";
import type { Scope } from "./scope.ts";
import type { SpectrumPlans } from "./spectrum-plans.ts";

/** What was measured of one stage on one channel. */
export interface StageMeasure {
  readonly planned: PlannedStage;
  /** False where the stage leaves this channel alone. */
  readonly active: boolean;
  readonly comparison: Comparison | null;
  readonly cross: CrossSpectra | null;
  readonly spectra: NodeSpectra | null;
  readonly alias: AliasSpectrum | null;
  /** Of the stage's output, after samples were dropped. */
  readonly counts: StateCounts;
}

/** What was measured of all stages together, at the first rate of the chain. */
export interface WholeMeasure {
  readonly comparison: Comparison;
  readonly cross: CrossSpectra | null;
  readonly spectra: NodeSpectra | null;
  /** Number of stages after the grid stage that it takes in. */
  readonly stages: number;
}

export interface ChainOptions {
  readonly plan: Plan;
  readonly channel: number;
  readonly scope: Scope;
  /** What stages with a first pass have learned, by place in plan.stages. */
  readonly learned: ReadonlyMap<number, unknown>;
  /** Number of stages after the grid stage to run; all when left out. */
  readonly depth?: number;
  /** Left out on a first pass: nothing is measured. */
  readonly spectra?: SpectrumPlans;
  /** Places in plan.stages whose alias limit is broken on the data: their output is marked suspect. */
  readonly suspect?: ReadonlySet<number>;
  readonly onGrid?: Emit;
  readonly sink: Emit;
  /** Full-rate output of the last stage before samples are first dropped, for the removed series. */
  readonly onBeforeDrop?: Emit;
}

/** One channel's way through the chain: kernels joined by sinks, with measurements at every node. */
export class ChannelChain {
  readonly measures: StageMeasure[] = [];
  /** From the resampled input to where samples are first dropped; null where not all of it is accounted for. */
  readonly whole: WholeMeasure | null;
  readonly gridCounts: StateCounts;
  private readonly rows;
  private readonly entry: { push: Emit; flush: () => void };

  constructor(options: ChainOptions) {
    const { plan, channel, scope } = options;
    this.rows = plan.gridStage.design.rowKernel({ marked: plan.rowStages.length > 0 });
    const grid = plan.gridStage.design.grid;
    this.gridCounts = new StateCounts(indexRange(grid, scope));
    const stages = plan.stages.slice(0, options.depth ?? plan.stages.length);
    const firstDrop = stages.findIndex((s) => s.design.keepEvery > 1);
    const tapAt = firstDrop >= 0 ? firstDrop : stages.length - 1;

    // Nodes are made from the front (they share transforms), sinks are joined from the back.
    const links: {
      kernel: Kernel;
      before: Emit[];
      after: Emit[];
      drop: Kernel;
      counts: StateCounts;
      suspect: boolean;
    }[] = [];
    let node = new Node(grid, 0, options);
    const start = node;
    const all = stages.slice(0, tapAt + 1).filter((s) => s.selected.includes(channel));
    const wanted =
      options.spectra !== undefined &&
      all.length > 0 &&
      all.every((s) => s.accounted || s.stage === "report");
    const startSpectra = wanted ? start.spectra() : null;
    let whole: WholeMeasure | null = null;
    for (const [i, planned] of stages.entries()) {
      const active = planned.selected.includes(channel);
      const { design } = planned;
      const dropping = design.keepEvery > 1;
      const measured = options.spectra !== undefined && planned.accounted && active;
      const fullRate = measured || (options.onBeforeDrop !== undefined && i === tapAt);
      const link = {
        kernel: active ? design.kernel({ fullRate, learned: options.learned.get(i) }) : passOn(),
        before: [] as Emit[],
        after: [] as Emit[],
        drop: dropping && fullRate ? keepEvery(design.keepEvery) : passOn(),
        counts: new StateCounts(indexRange(design.grid, scope)),
        suspect: active && options.suspect?.has(i) === true,
      };
      const range = indexRange(node.grid, scope);
      let comparison: Comparison | null = null;
      let cross: CrossSpectra | null = null;
      let spectra: NodeSpectra | null = null;
      // What the output lags behind its input, in input samples, after moved stamps are counted.
      const lag = active ? lagSamples(planned) : 0;
      const steps = Math.floor(lag + 1e-9);
      const fraction = Math.abs(lag - steps) < 1e-9 ? 0 : lag - steps;
      const full = new Node(dropping ? node.grid : design.grid, node.shift + steps, options);
      if (measured) {
        comparison = new Comparison(fraction === 0 ? steps : null, range);
        link.before.push((b) => comparison?.pushBefore(b));
        link.after.push((b) => comparison?.pushAfter(b));
        const before = node.spectra();
        const after = full.spectra();
        if (before !== null && after !== null) {
          spectra = before;
          cross = new CrossSpectra(before, after, fraction);
        }
      }
      const alias =
        options.spectra !== undefined && design.alias !== null && active
          ? new AliasSpectrum(options.spectra.forAlias(node.grid, design.keepEvery), planned, range)
          : null;
      if (wanted && i === 0) link.before.push((b) => whole?.comparison.pushBefore(b));
      if (wanted && i === tapAt) {
        const total = all.reduce((sum, s) => sum + lagSamples(s), 0);
        const rounded = Math.round(total);
        const made = new Comparison(
          Math.abs(total - rounded) < 1e-9 ? rounded : null,
          indexRange(grid, scope),
        );
        link.after.push((b) => made.pushAfter(b));
        const endSpectra = full.spectra();
        const crossed = startSpectra !== null && endSpectra !== null;
        whole = {
          comparison: made,
          // The nodes' shifts are whole; what is left of the delay is turned on the spectra.
          cross: crossed ? new CrossSpectra(startSpectra, endSpectra, total - full.shift) : null,
          spectra: crossed ? startSpectra : null,
          stages: tapAt + 1,
        };
      }
      if (alias !== null) link.before.push((b) => alias.push(b));
      if (options.onBeforeDrop !== undefined && i === tapAt) link.after.push(options.onBeforeDrop);
      node.attach(link.before);
      this.measures.push({ planned, active, comparison, cross, spectra, alias, counts: link.counts });
      links.push(link);
      if (dropping) {
        full.attach(link.after);
        node = new Node(coarserGrid(node.grid, design.keepEvery), 0, options);
      } else node = full;
    }
    this.whole = whole;
    const ending: Emit[] = [];
    node.attach(ending);

    let push: Emit = (block) => {
      for (const each of ending) each(block);
      options.sink(block);
    };
    let flush = () => {};
    for (let i = links.length - 1; i >= 0; i--) {
      const link = links[i]!;
      const next = push;
      const nextFlush = flush;
      const out: Emit = (block) => {
        if (link.suspect) markSuspect(block);
        link.counts.push(block);
        next(block);
      };
      const full: Emit = (block) => {
        if (block.values.length === 0) return;
        for (const each of link.after) each(block);
        link.drop.push(block, out);
      };
      push = (block) => {
        for (const each of link.before) each(block);
        link.kernel.push(block, full);
      };
      flush = () => {
        link.kernel.flush(full);
        nextFlush();
      };
    }
    this.entry = {
      push: (block: GridBlock) => {
        this.gridCounts.push(block);
        options.onGrid?.(block);
        push(block);
      },
      flush: () => flush(),
    };
  }

  /** @param marks  where row stages stand above */
  push(times: Float64Array, column: Float64Array, count: number, marks?: Uint8Array): void {
    this.rows.push(times, column, count, this.entry.push, marks);
  }

  flush(): void {
    this.rows.flush(this.entry.push);
    this.entry.flush();
  }

  interpolationEffect(): Record<string, unknown> {
    return this.rows.effect();
  }
}

/** How far the output's index lags behind the input's, in input samples (not whole for even lengths). */
export function lagSamples(planned: PlannedStage): number {
  const { design } = planned;
  return design.delay.samples - design.delay.indexSamples;
}

function markSuspect(block: GridBlock): void {
  for (let i = 0; i < block.marks.length; i++)
    if (!Number.isNaN(block.values[i]!)) block.marks[i]! |= SUSPECT;
}

/** A place between two stages: makes its transforms once, however many listen. */
class Node {
  readonly grid: Grid;
  readonly shift: number;
  private readonly options: ChainOptions;
  private made: NodeSpectra | null = null;

  constructor(grid: Grid, shift: number, options: ChainOptions) {
    this.grid = grid;
    this.shift = shift;
    this.options = options;
  }

  spectra(): NodeSpectra | null {
    const plan = this.options.spectra?.forNode(this.grid) ?? null;
    if (this.made === null && plan !== null)
      this.made = new NodeSpectra(plan, this.shift, indexRange(this.grid, this.options.scope));
    return this.made;
  }

  attach(list: Emit[]): void {
    const { made } = this;
    if (made !== null) list.push((block) => made.push(block));
  }
}
