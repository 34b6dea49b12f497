/** The plan of a run: every stage designed, before any data. */
import type { Grid } from "../signal/grid.ts";
import type { GridDesign, ReportSettings, RowStageDesign, Signal, StageDesign } from "../stages/stage.ts";

export interface PlannedStage {
  /** 1-based place in the chain. */
  readonly place: number;
  readonly stage: string;
  readonly signalIn: Signal;
  readonly design: StageDesign;
  /** Indices of the channels that the stage works on. */
  readonly selected: readonly number[];
  /** Whether a report stage below accounts for it. */
  readonly accounted: boolean;
}

/** A stage that works on rows, before the grid. */
export interface PlannedRowStage {
  /** 1-based place in the chain. */
  readonly place: number;
  readonly stage: string;
  readonly signalIn: Signal;
  readonly design: RowStageDesign;
  readonly selected: readonly number[];
}

export interface Plan {
  /** With the unit that they have on the grid: calibration may have changed it. */
  readonly channels: readonly { readonly name: string; readonly column: string; readonly unit: string }[];
  /** The stages before the grid, in order. */
  readonly rowStages: readonly PlannedRowStage[];
  /** The stage that leads from rows to the grid. */
  readonly gridStage: PlannedStage & { readonly design: GridDesign };
  /** The stages after it, in order. */
  readonly stages: readonly PlannedStage[];
  /** Settings of the chain's report stage; null when it has none. */
  readonly report: ReportSettings | null;
  /** Grid of the clean series. */
  readonly outGrid: Grid;
}
