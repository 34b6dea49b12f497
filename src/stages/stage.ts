/**
 * The contract of a stage. A stage is one file: its settings schema, what it is by design (known before
 * any data), and its kernel at work on the data. Everything else of the house treats all stages alike.
 */
import type { z } from "zod";
import type { Grid } from "../signal/grid.ts";
import type { GridBlock, Kernel } from "../signal/grid-block.ts";
import type { MarkedRows } from "../signal/marked-rows.ts";
import type { WindowKind } from "../signal/windows.ts";

/** A filter at the rate of its grid, for combined responses. */
export interface FilterTaps {
  readonly taps: Float64Array;
  readonly interval_s: number;
}

export interface SignalChannel {
  readonly name: string;
  readonly unit: string;
  /** Present while only these stretches of time are in another unit: microseconds, until is outside. */
  readonly converting?: {
    readonly unit: string;
    readonly spans: readonly { readonly from_us: number; readonly until_us: number }[];
  };
}

/** The signal between two stages, as far as the design knows it. */
export interface Signal {
  /** null: rows with times of their own, before `resample`. */
  readonly grid: Grid | null;
  readonly channels: readonly SignalChannel[];
  /** Per channel (same order): the filters that it has passed since the grid began. */
  readonly filters: readonly (readonly FilterTaps[])[];
  /** Interval of the chain's first grid, seconds; null before it. */
  readonly finest_s: number | null;
}

/** A mistake seen by a stage's design, with the setting it concerns (empty path: the stage itself). */
export interface Problem {
  readonly code: string;
  readonly severity: "error" | "warning";
  readonly path: readonly (string | number)[];
  readonly problem: string;
  readonly given?: string;
  readonly allowed?: string;
  readonly todo?: string;
}

/** Group delay, in samples of the stage's input; real numbers, never truncated. */
export interface Delay {
  /** Delay of the stage's filter run over past samples only. */
  readonly samples: number;
  /** Samples by which the window reaches past its output's index: taken back on the index. */
  readonly indexSamples: number;
  /** Seconds that time stamps are moved or windows centred to take the delay back. */
  readonly compensated_s: number;
}

/** Worst gain, on the design and against the band kept, of what folds into that band when samples are dropped. */
export interface AliasDesign {
  readonly antiAlias: "designed" | "upstream" | "none";
  readonly accepted: boolean;
  readonly keptTo_Hz: number;
  readonly worstGain_dB: number;
  readonly source_Hz: number;
  readonly limit_dB: number;
  readonly met: boolean;
}

export interface StageDesign {
  /** The grid of the stage's output. */
  readonly grid: Grid;
  /** One plain sentence: what the stage does to the data. */
  readonly says: string;
  /** Settings as resolved, with defaults and echoes, for the account. */
  readonly settings: Record<string, unknown>;
  /** The stage's own filter in convolution order at its input's rate; null when it has none. */
  readonly taps: Float64Array | null;
  readonly delay: Delay;
  /** Samples of the input needed before and after an output's time; null: the whole record. */
  readonly reach: { readonly before: number; readonly after: number } | null;
  /** Length of the zone at each end of a run where the window is not full, seconds. */
  readonly end_s: number;
  /** 1: the rate stays. */
  readonly keepEvery: number;
  readonly alias: AliasDesign | null;
  /** Facts for people and for the account that only this stage has. */
  readonly notes: Record<string, unknown>;
  /** Present where the stage needs a pass over the record first (a trend). */
  readonly learn?: (extent: { readonly first: number; readonly last: number }) => Learner;
  /**
   * The kernel for one channel. With fullRate, a stage that drops samples computes its filter at every
   * input sample (the engine drops them afterwards), so that what it removes can be measured.
   */
  readonly kernel: (options: { readonly fullRate: boolean; readonly learned?: unknown }) => Kernel;
  /** What the stage learned, for the account. */
  readonly learnedNotes?: (learned: unknown, unit: string) => unknown;
}

/** First pass of a stage that must see the record before it can work. */
export interface Learner {
  push(block: GridBlock): void;
  finish(): unknown;
}

/** Turns the rows of one channel into grid samples. */
export interface RowKernel extends Omit<Kernel, "push"> {
  /**
   * times strictly increasing, integer microseconds; NaN values are absent.
   * @param marks  of the rows, where row stages stand above: NaN with SCREENED is a rejected value
   */
  push(
    times: Float64Array,
    values: Float64Array,
    count: number,
    emit: (block: GridBlock) => void,
    marks?: Uint8Array,
  ): void;
  /** What interpolation did, for the account. */
  effect(): Record<string, unknown>;
}

/** The design of a report stage. */
export interface ReportDesign extends StageDesign {
  readonly report: ReportSettings;
}

/** The design of the one stage that leads from rows to a grid. */
export interface GridDesign extends StageDesign {
  /** @param marked  rows come with marks */
  readonly rowKernel: (options: { readonly marked: boolean }) => RowKernel;
  /** Problems that only the log's own interval shows. */
  readonly checkInterval: (nominal_s: number) => Problem[];
  /** The effect of interpolation on the spectrum: mean |H|^2 at f, from what `effect` counted. */
  readonly interpolation: {
    readonly between: string;
    /** null where the method has no response because it is not linear. */
    readonly meanPowerGain: (
      effect: Record<string, unknown>,
      f_Hz: number,
      rowInterval_s: number,
    ) => number | null;
  };
}

/** A value that a row stage kept out or called suspect; the raw value is kept in the account. */
export interface RowFinding {
  readonly time_us: number;
  readonly value: number;
  readonly reason: string;
}

/** What a row stage did to one channel. */
export interface RowEffect {
  /** Values kept out, and values called suspect, by reason. */
  readonly rejected: Readonly<Record<string, number>>;
  readonly suspect: Readonly<Record<string, number>>;
  /** The first of each, in order of time. */
  readonly firstRejected: readonly RowFinding[];
  readonly firstSuspect: readonly RowFinding[];
  /** Facts that only this stage has. */
  readonly notes: Readonly<Record<string, unknown>>;
}

/**
 * Works on rows with times of their own: all channels of a series together. It may change values and add marks,
 * but emits the same rows in the same order, if later; it must not write into the arrays that it is given.
 */
export interface RowStageKernel {
  push(block: MarkedRows, emit: (block: MarkedRows) => void): void;
  flush(emit: (block: MarkedRows) => void): void;
  /** Complete after flush. */
  effect(channel: number): RowEffect;
}

/** The design of a stage that works on rows, before resample. */
export interface RowStageDesign {
  /** One plain sentence: what the stage does to the data. */
  readonly says: string;
  readonly settings: Record<string, unknown>;
  /** The channels as they leave: calibration changes units. */
  readonly channels: readonly SignalChannel[];
  /** What is done to a row can depend on rows this far away, seconds; null: on all rows before. */
  readonly reach_s: { readonly before: number | null; readonly after: number };
  readonly notes: Record<string, unknown>;
  /** Problems that only the log's own interval shows. */
  readonly checkInterval?: (nominal_s: number) => Problem[];
  readonly rowStage: () => RowStageKernel;
}

export type AnyDesign = StageDesign | RowStageDesign;

export interface DesignOutcome<D extends AnyDesign = StageDesign> {
  /** null when a problem of severity error stands in the way. */
  readonly design: D | null;
  readonly problems: readonly Problem[];
}

export interface Stage<S extends z.ZodType = z.ZodType, D extends AnyDesign = StageDesign> {
  readonly name: string;
  /** One sentence for `forebay stages`. */
  readonly about: string;
  readonly settings: S;
  /** What it works on: samples on an even grid when left out. */
  readonly worksOn?: "rows";
  /**
   * @param settings  parsed by the schema
   * @param signal    the stage's input
   * @param selected  indices of the channels that the stage works on
   */
  readonly design: (settings: z.output<S>, signal: Signal, selected: readonly number[]) => DesignOutcome<D>;
}

export type AnyStage = Stage<z.ZodType, AnyDesign>;

/** Settings that the report stage hands to the account. */
export interface ReportSettings {
  readonly resolution_Hz: number | null;
  readonly window: WindowKind;
  readonly bands: readonly { readonly name: string; readonly from_Hz: number; readonly to_Hz: number }[];
  readonly tones: number;
  /** Account for one-third octaves too. */
  readonly thirdOctaves: boolean;
}
