/**
 * The account: what `NAME.account.json` holds, format "forebay-account/1".
 * Keys are lower_snake with the unit as suffix (unit symbols keep their case). `null` is "not known" or
 * "does not apply", never zero. Powers are in the channel's unit squared; PSDs one-sided, unit squared per Hz.
 */

export interface Account {
  format: "forebay-account/1";
  software: { name: "forebay"; version: string };
  pipeline: { name: string; about: string | null; sha256: string; text: string };
  /** The logger that the series belongs to; null when the pipeline has one series. */
  logger: string | null;
  channels: { name: string; unit: string; column: string }[];
  /** Stretch of time that was asked for; null where it is open. */
  scope: { from: string | null; until: string | null };
  inputs: InputAccount[];
  timing: TimingAccount | null;
  stages: StageAccount[];
  chain: ChainAccount;
  requirements: RequirementAccount[];
  /** The verdict that stands on top of the report. */
  verdict: { met: boolean; remarks: string[] };
  cautions: string[];
  outputs: OutputAccount[];
}

export interface InputAccount {
  file: string;
  bytes: number;
  sha256: string;
  rows: {
    read: number;
    used: number;
    merged: number;
    set_aside: Record<string, number>;
    /** First few physical line numbers per reason. */
    set_aside_lines: Record<string, number[]>;
    reordered: number;
    reordered_lines: number[];
  };
  missing_cells: Record<string, number>;
  unreadable_cells: Record<string, { count: number; lines: number[] }>;
  found: Record<string, string>;
}

export interface TimingAccount {
  first: string;
  last: string;
  rows: number;
  /** Median of the steps between rows. */
  nominal_interval_s: number;
  /** Least-squares slope of row time against row number, over steps counted in nominal intervals. */
  fitted_interval_s: number | null;
  drift_ppm: number | null;
  jitter_sd_s: number | null;
  gap_count: number;
  gap_total_s: number;
  /** The longest gaps (at most 50), in order of time: longer than 1.5 nominal intervals. */
  gaps: { from: string; to: string; length_s: number }[];
}

export type State =
  | "measured"
  | "filled"
  | "end"
  | "thin"
  | "suspect"
  | "provisional"
  | "screened"
  | "missing";

export interface StageAccount {
  /** 1-based place in the chain. */
  place: number;
  stage: string;
  /** One plain sentence: what the stage did to the data. */
  says: string;
  settings: Record<string, unknown>;
  /** interval_s is null for rows before resampling; samples counts grid samples (or rows) per channel. */
  in: { interval_s: number | null; samples: number };
  out: { interval_s: number | null; samples: number };
  /** Number of taps of the stage's own filter; null when it has none. */
  taps: number | null;
  coefficients: number[] | null;
  delay: { samples: number; introduced_s: number; compensated_s: number; residual_s: number };
  /** The value at t uses data up to t + look_ahead_s. null: the whole record. */
  look_ahead_s: number | null;
  /** Length at each end of a run over which the window is not full. */
  end_s: number;
  rise_s: number | null;
  /** Overshoot of the step response, percent of the step. */
  overshoot_pct: number | null;
  /** Frequencies where the gain first is 1, 3 and 6 dB below the largest; two for band shapes. */
  gain: {
    dc: number;
    f_1dB_Hz: number | number[] | null;
    f_3dB_Hz: number | number[] | null;
    f_6dB_Hz: number | number[] | null;
  } | null;
  /** One-sided equivalent noise bandwidth. */
  enbw_Hz: number | null;
  /** For plotting: |H| in dB at frequencies from 0 to the Nyquist frequency of the stage's input. */
  response: { frequency_Hz: number[]; gain_dB: number[] } | null;
  /** For plotting: answer to a unit step, by time since the step reached the filter's middle. */
  step: { time_s: number[]; value: number[] } | null;
  /** Where mains hum and harmonics land when samples are dropped; empty when the rate stays. */
  folds: { frequency_Hz: number; lands_at_Hz: number; gain_dB: number; inverted: boolean }[];
  channels: Record<string, ChannelAccount>;
  alias: AliasAccount | null;
  /** Facts that only this stage has: trend coefficients, interpolation effect, … */
  notes: Record<string, unknown>;
}

export interface ChannelAccount {
  unit: string;
  /** Whether the removal was measured: a report stage stands below this stage. */
  accounted: boolean;
  /** Samples over which the sums run: those present both before and after. */
  samples: number;
  mean_in: number | null;
  mean_out: number | null;
  /** Root mean square about the mean. */
  rms_in: number | null;
  rms_out: number | null;
  rms_removed: number | null;
  variance_removed_pct: number | null;
  /** Unit squared. */
  variance_removed: number | null;
  /** Delay by cross-correlation of input and output, beside the stated one; correlation at its peak. */
  delay_measured: { delay_s: number; stated_s: number; correlation: number } | null;
  /** For plotting: before and after on the stage's own grids. */
  strip: StripAccount | null;
  /** When it was removed: rms per column of time, and the largest single removals. */
  removal: RemovalAccount | null;
  /** How the removal was measured: sums over samples, or segment spectra where the delay is not whole. */
  basis: "samples" | "segment spectra" | null;
  extremes: {
    highest_in: Extreme | null;
    highest_out: Extreme | null;
    lowest_in: Extreme | null;
    lowest_out: Extreme | null;
    /** Highest before minus highest after: what the peak lost. */
    height_lost: number | null;
    /** Lowest after minus lowest before: what the trough lost. */
    depth_lost: number | null;
  } | null;
  bands: BandAccount[];
  tones: ToneAccount[];
  spectrum: SpectrumAccount | null;
  /** Samples of the stage's output by the last state that holds, and how often each state holds at all. */
  counts: Record<State, number>;
  holds: Record<State, number>;
}

export interface RemovalAccount {
  from: string;
  column_s: number;
  /** rms of what was removed in each column; null where nothing could be compared. */
  rms: (number | null)[];
  /** Lowest and highest removed value in each column. */
  low: (number | null)[];
  high: (number | null)[];
  /** The largest removed values, each the largest of its column and farther apart than one column. */
  events: { time: string; removed: number; times_rms: number }[];
}

export interface Extreme {
  value: number;
  time: string;
}

export interface BandAccount {
  name: string;
  from_Hz: number;
  to_Hz: number;
  p_in: number;
  p_out: number;
  p_removed: number;
  /** 2 Re of the cross power of output and removed. */
  cross: number;
  /** (p_out + p_removed + cross - p_in) / p_in. */
  closure: number | null;
  /** Output power expected from the input spectrum and |H|². */
  predicted_out: number | null;
  /** Whether what was measured lies within the 95 % interval about what was predicted. */
  as_predicted: boolean | null;
  degrees_of_freedom: number;
  /** What can be said: "removed", "kept", "added", "not resolved" with the 95 % interval counted. */
  finding: string;
}

export interface ToneAccount {
  frequency_Hz: number;
  /** Peak amplitude in the channel's unit, before the stage. */
  amplitude: number;
  gain_dB: number;
  /** Frequency at which it stands after the stage (and, where it folds, where it lands). */
  lands_at_Hz: number;
  folds: boolean;
}

export interface SpectrumAccount {
  window: string;
  overlap_pct: number;
  segment_samples: number;
  /** Bin spacing. */
  resolution_Hz: number;
  enbw_Hz: number;
  segments: number;
  degrees_of_freedom: number;
  /** Multiply a PSD by these for the 95 % interval of one bin. */
  interval_95: { lower: number; upper: number };
  /** Integral of the PSD before the stage, unit squared, and the mean square of the same windowed segments. */
  integral_in: number;
  mean_square_in: number;
  /** For plotting: at most 256 cells, evenly spread in log frequency, each the mean PSD of its bins. */
  frequency_Hz: number[];
  psd_in: number[];
  psd_out: number[];
  psd_removed: number[];
}

export interface AliasAccount {
  /** How the check was made. */
  anti_alias: "designed" | "upstream" | "none";
  accepted: boolean;
  kept_to_Hz: number;
  /** Worst gain, on the design, of any frequency that folds into the band kept. */
  design_worst_gain_dB: number;
  design_source_Hz: number;
  design_met: boolean;
  /** On the data: worst ratio, over the bands, of power that folds in to power that belongs there. */
  ratio_dB: number | null;
  worst_channel: string | null;
  worst_band: { from_Hz: number; to_Hz: number } | null;
  source_Hz: number | null;
  lands_at_Hz: number | null;
  limit_dB: number;
  met: boolean;
}

export interface ChainAccount {
  in_interval_s: number;
  out_interval_s: number;
  delay_s: number;
  introduced_s: number;
  compensated_s: number;
  look_ahead_s: number | null;
  end_s: number;
  rise_s: number | null;
  first: string | null;
  last: string | null;
  /** From the resampled input to the clean series, per channel. */
  channels: Record<string, ChainChannelAccount>;
}

export interface ChainChannelAccount {
  unit: string;
  rms_in: number | null;
  rms_out: number | null;
  counts: Record<State, number>;
  /**
   * All stages together, on the grid of the resampled input, up to and with the filter of the first stage that
   * drops samples; null without a report stage.
   */
  removal: ChannelAccount | null;
  /** For plotting: lowest and highest per column of time, on the resampled input, the clean series. */
  strip: StripAccount;
}

/** Lowest and highest value per column of time, before and after. */
export interface StripAccount {
  from: string;
  column_s: number;
  in_low: (number | null)[];
  in_high: (number | null)[];
  out_low: (number | null)[];
  out_high: (number | null)[];
  /** Worst state of the clean series in each column; null where it has no sample. */
  out_state: (State | null)[];
}

export interface RequirementAccount {
  requirement: string;
  channel: string | null;
  predicted: string | null;
  measured: string | null;
  margin: string | null;
  met: boolean;
}

export interface OutputAccount {
  file: string;
  bytes: number;
  sha256: string;
  rows: number;
}
