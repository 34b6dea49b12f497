/** What was measured of one stage on one channel. */
import { lagSamples, type StageMeasure } from "../engine/channel-chain.ts";
import type { Comparison } from "../engine/comparison.ts";
import type { StateCounts } from "../engine/counts.ts";
import type { CrossSpectra } from "../engine/cross-spectra.ts";
import type { ChannelResult } from "../engine/run-chain.ts";
import type { Extremes } from "../engine/sums.ts";
import { isoTime } from "../outputs/cell-text.ts";
import type { Plan, PlannedStage } from "../pipeline/plan-types.ts";
import { convolveTaps } from "../signal/convolve.ts";
import { type Grid, intervalSeconds, timeOf } from "../signal/grid.ts";
import { bandPower } from "../signal/welch.ts";
import type { ChannelAccount, Extreme } from "./account-format.ts";
import { measuredDelay } from "./measured-delay.ts";
import { bandAccounts, densities, spectrumAccount, toneAccounts } from "./spectrum-account.ts";
import { stripAccount } from "./strip-account.ts";

/** What a measure must have to be accounted for. */
type Measured = Pick<StageMeasure, "comparison" | "cross" | "spectra" | "counts">;

/** @param outGrid  grid of the output before samples are dropped, where it is not the stage's own */
export function channelAccount(
  plan: Plan,
  planned: PlannedStage,
  measure: Measured,
  unit: string,
  outGrid: Grid = planned.design.keepEvery > 1 ? planned.signalIn.grid! : planned.design.grid,
): ChannelAccount {
  const base = { ...unmeasured(unit), ...counted(measure.counts) };
  const { comparison } = measure;
  if (comparison === null || plan.report === null) return base;
  const grid = planned.signalIn.grid!;
  const sums = comparison.sums.figures();
  const d =
    measure.cross === null || measure.spectra === null
      ? null
      : densities(measure.spectra.plan, measure.cross);
  const { taps } = planned.design;
  const whole = Math.abs(lagSamples(planned) - Math.round(lagSamples(planned))) < 1e-9;
  return {
    ...base,
    accounted: true,
    samples: sums?.count ?? 0,
    mean_in: sums?.meanIn ?? null,
    mean_out: sums?.meanOut ?? null,
    rms_in: sums === null ? null : Math.sqrt(sums.varianceIn),
    rms_out: sums === null ? null : Math.sqrt(sums.varianceOut),
    rms_removed: sums === null ? spectralRms(d) : Math.sqrt(sums.varianceRemoved),
    variance_removed_pct:
      sums === null
        ? spectralShare(d)
        : sums.varianceIn > 0
          ? (100 * sums.varianceRemoved) / sums.varianceIn
          : 0,
    basis: sums !== null ? "samples" : d !== null && !whole ? "segment spectra" : null,
    variance_removed: sums?.varianceRemoved ?? (d === null ? null : power(d, d.rr)),
    delay_measured: measure.cross === null ? null : delayMeasured(planned, measure.cross),
    strip: stripAccount(comparison.beforeStrip, grid, comparison.afterStrip, outGrid),
    removal: removalAccount(comparison, grid),
    extremes: extremes(comparison, grid, outGrid),
    bands: d === null ? [] : bandAccounts(d, plan.report.bands, taps, plan.report.thirdOctaves),
    tones: d === null ? [] : toneAccounts(d, taps, planned.design.keepEvery, plan.report.tones),
    spectrum: d === null ? null : spectrumAccount(d, plan.report.window),
  };
}

/** Events listed, and how many times the rms removed one must be to be told. */
const EVENTS = 5;
const EVENT_TIMES_RMS = 3;

function removalAccount(comparison: Comparison, grid: Grid): ChannelAccount["removal"] {
  const columns = comparison.removal.list();
  const { width } = comparison.removal;
  const first = columns[0]?.first;
  if (first === undefined) return null;
  const count = (columns.at(-1)!.first - first) / width + 1;
  const none = (): (number | null)[] => new Array(count).fill(null);
  const [rms, low, high] = [none(), none(), none()];
  let square = 0;
  let samples = 0;
  for (const column of columns) {
    const at = (column.first - first) / width;
    rms[at] = Math.sqrt(column.square / column.samples);
    low[at] = column.low;
    high[at] = column.high;
    square += column.square;
    samples += column.samples;
  }
  const overall = Math.sqrt(square / samples);
  const events: (typeof columns)[number][] = [];
  for (const c of [...columns].sort(
    (x, y) => Math.abs(y.largest) - Math.abs(x.largest) || x.first - y.first,
  )) {
    if (events.length === EVENTS || !(Math.abs(c.largest) > EVENT_TIMES_RMS * overall)) break;
    // A neighbouring column holds the same event.
    if (!events.some((e) => Math.abs(e.first - c.first) <= width)) events.push(c);
  }
  return {
    from: isoTime(timeOf(grid, first)),
    column_s: width * intervalSeconds(grid),
    rms,
    low,
    high,
    events: events.map((c) => ({
      time: isoTime(timeOf(grid, c.largestAt)),
      removed: c.largest,
      times_rms: Math.abs(c.largest) / overall,
    })),
  };
}

function delayMeasured(planned: PlannedStage, cross: CrossSpectra): ChannelAccount["delay_measured"] {
  const measured = measuredDelay(cross);
  if (measured === null) return null;
  const interval = intervalSeconds(planned.signalIn.grid!);
  const stated_s = planned.design.delay.samples * interval - planned.design.delay.compensated_s;
  return {
    delay_s: stated_s + measured.beyond_samples * interval,
    stated_s,
    correlation: measured.correlation,
  };
}

function extremes(
  comparison: Comparison,
  grid: Grid,
  outGrid: Grid,
): NonNullable<ChannelAccount["extremes"]> {
  const found = {
    highest_in: extreme(comparison.before, grid, "high"),
    highest_out: extreme(comparison.after, outGrid, "high"),
    lowest_in: extreme(comparison.before, grid, "low"),
    lowest_out: extreme(comparison.after, outGrid, "low"),
  };
  const less = (a: Extreme | null, b: Extreme | null) =>
    a === null || b === null ? null : a.value - b.value;
  return {
    ...found,
    height_lost: less(found.highest_in, found.highest_out),
    depth_lost: less(found.lowest_out, found.lowest_in),
  };
}

type Spectral = ReturnType<typeof densities>;

const power = (d: NonNullable<Spectral>, density: Float64Array) =>
  bandPower(density, d.plan.resolution_Hz, 0, d.plan.frequency(d.plan.bins - 1));

function spectralRms(d: Spectral): number | null {
  return d === null ? null : Math.sqrt(power(d, d.rr));
}

function spectralShare(d: Spectral): number | null {
  if (d === null) return null;
  const all = power(d, d.xx);
  return all > 0 ? (100 * power(d, d.rr)) / all : 0;
}

/** A channel of which only the states are counted. */
export function unmeasured(unit: string): Omit<ChannelAccount, "counts" | "holds"> {
  return {
    unit,
    accounted: false,
    samples: 0,
    mean_in: null,
    mean_out: null,
    rms_in: null,
    rms_out: null,
    rms_removed: null,
    variance_removed_pct: null,
    variance_removed: null,
    delay_measured: null,
    strip: null,
    removal: null,
    basis: null,
    extremes: null,
    bands: [],
    tones: [],
    spectrum: null,
  };
}

export function counted(counts: StateCounts): Pick<ChannelAccount, "counts" | "holds"> {
  return { counts: counts.states(), holds: counts.holds() };
}

function extreme(found: Extremes, grid: Grid, which: "high" | "low"): Extreme | null {
  if (!found.any) return null;
  return which === "high"
    ? { value: found.high, time: isoTime(timeOf(grid, found.highAt)) }
    : { value: found.low, time: isoTime(timeOf(grid, found.lowAt)) };
}

/** All stages together, from the resampled input to where samples are first dropped; null where not measured. */
export function wholeAccount(plan: Plan, channel: number, result: ChannelResult): ChannelAccount | null {
  const { whole } = result;
  if (whole === null) return null;
  const stages = plan.stages.slice(0, whole.stages).filter((s) => s.selected.includes(channel));
  const last = plan.stages[whole.stages - 1]!;
  const sum = (figure: (s: PlannedStage) => number) => stages.reduce((total, s) => total + figure(s), 0);
  // A trend has no response, so nothing is predicted where one was taken out.
  const taps = stages.some((s) => s.design.learn !== undefined)
    ? null
    : stages.reduce<Float64Array>(
        (all, s) => (s.design.taps === null ? all : convolveTaps(all, s.design.taps)),
        Float64Array.of(1),
      );
  const together: PlannedStage = {
    ...last,
    signalIn: { ...last.signalIn, grid: plan.gridStage.design.grid },
    design: {
      ...last.design,
      taps,
      delay: {
        samples: sum((s) => s.design.delay.samples),
        indexSamples: sum((s) => s.design.delay.indexSamples),
        compensated_s: sum((s) => s.design.delay.compensated_s),
      },
    },
  };
  const outGrid = last.design.keepEvery > 1 ? last.signalIn.grid! : last.design.grid;
  const counts = result.measures[whole.stages - 1]!.counts;
  return channelAccount(plan, together, { ...whole, counts }, plan.channels[channel]!.unit, outGrid);
}
