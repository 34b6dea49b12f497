/** Rows on their way through the row stages, all channels together, counted after every stage. */
import type { RowBlock } from "../logs/rows.ts";
import type { PlannedRowStage } from "../pipeline/plan-types.ts";
import type { MarkedRows } from "../signal/marked-rows.ts";
import { MISSING } from "../signal/marks.ts";
import type { RowEffect, RowStageKernel } from "../stages/stage.ts";
import { StateCounts } from "./counts.ts";

const EVERYWHERE = { from: Number.NEGATIVE_INFINITY, until: Number.POSITIVE_INFINITY };

/** What was measured of one row stage on one channel. */
export interface RowMeasure {
  readonly planned: PlannedRowStage;
  readonly active: boolean;
  /** Of the rows as they left the stage. */
  readonly counts: StateCounts;
  readonly effect: RowEffect;
}

export class RowChain {
  private readonly stages: readonly PlannedRowStage[];
  private readonly kernels: readonly RowStageKernel[];
  /** By stage, then channel. */
  private readonly counts: readonly StateCounts[][];
  private readonly entry: (block: MarkedRows) => void;
  private readonly sinks: ((block: MarkedRows) => void)[] = [];
  private marks: Uint8Array[];

  constructor(stages: readonly PlannedRowStage[], channels: number, sink: (block: MarkedRows) => void) {
    this.stages = stages;
    this.kernels = stages.map((s) => s.design.rowStage());
    this.counts = stages.map(() => Array.from({ length: channels }, () => new StateCounts(EVERYWHERE)));
    this.marks = Array.from({ length: channels }, () => new Uint8Array(0));
    let next = sink;
    for (let i = stages.length - 1; i >= 0; i--) {
      const kernel = this.kernels[i]!;
      const onward = next;
      const out = (block: MarkedRows) => {
        if (block.count === 0) return;
        this.tally(i, block);
        onward(block);
      };
      this.sinks[i] = out;
      next = (block) => kernel.push(block, out);
    }
    this.entry = next;
  }

  push(block: RowBlock): void {
    const { count, times, columns } = block;
    if (count > (this.marks[0]?.length ?? 0)) this.marks = columns.map(() => new Uint8Array(count));
    columns.forEach((column, c) => {
      const marks = this.marks[c]!;
      for (let i = 0; i < count; i++) marks[i] = Number.isNaN(column[i]!) ? MISSING : 0;
    });
    this.entry({ count, times, columns, marks: this.marks });
  }

  flush(): void {
    this.kernels.forEach((kernel, i) => kernel.flush(this.sinks[i]!));
  }

  /** Complete after flush. */
  measures(channel: number): RowMeasure[] {
    return this.stages.map((planned, i) => ({
      planned,
      active: planned.selected.includes(channel),
      counts: this.counts[i]![channel]!,
      effect: this.kernels[i]!.effect(channel),
    }));
  }

  private tally(stage: number, { count, columns, marks }: MarkedRows): void {
    columns.forEach((column, c) =>
      this.counts[stage]![c]!.push({
        first: 0,
        values: column.subarray(0, count),
        marks: marks[c]!.subarray(0, count),
      }),
    );
  }
}
