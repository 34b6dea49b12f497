/** What the account says of one stage: its design's figures, and what was measured on each channel. */

import type { AliasMeasure } from "../engine/alias-spectrum.ts";
import type { ChannelResult } from "../engine/run-chain.ts";
import type { Plan, PlannedStage } from "../pipeline/plan-types.ts";
import { filterFigures } from "../signal/filter-figures.ts";
import { foldedFrequency } from "../signal/fold.ts";
import { intervalSeconds } from "../signal/grid.ts";
import type { AliasAccount, ChannelAccount, StageAccount } from "./account-format.ts";
import { turnedPower_pct } from "./adviser.ts";
import { stageGain } from "./chain-response.ts";
import { channelAccount, counted, unmeasured } from "./channel-account.ts";
import { decibels, densities } from "./spectrum-account.ts";

const RESPONSE_POINTS = 400;
const MAINS_Hz = [50, 60];
const HARMONICS = 5;

/** One-decimal-free number or list, as the design's keys want it: number for one edge, list for two. */
function edge(list: readonly number[], interval_s: number): number | number[] | null {
  const hz = list.map((f) => f / interval_s);
  return hz.length === 0 ? null : hz.length === 1 ? hz[0]! : hz;
}

/** The part that is known before any data. */
export function stageDesignAccount(plan: Plan, planned: PlannedStage): StageAccount {
  const { design, signalIn } = planned;
  const interval = signalIn.grid === null ? null : intervalSeconds(signalIn.grid);
  const out = intervalSeconds(design.grid);
  const step = interval ?? out;
  const figures = design.taps === null || design.taps.length < 2 ? null : filterFigures(design.taps);
  const introduced = design.delay.samples * step;
  return {
    place: planned.place,
    stage: planned.stage,
    says: design.says,
    settings: design.settings,
    in: { interval_s: interval, samples: 0 },
    out: { interval_s: out, samples: 0 },
    taps: design.taps?.length ?? null,
    coefficients: design.taps === null ? null : Array.from(design.taps),
    delay: {
      samples: design.delay.samples,
      introduced_s: introduced,
      compensated_s: design.delay.compensated_s,
      residual_s: introduced - design.delay.compensated_s,
    },
    look_ahead_s: design.reach === null ? null : lookAhead(planned, step),
    end_s: design.end_s,
    rise_s: figures?.rise == null ? null : figures.rise * step,
    overshoot_pct: figures?.overshoot == null ? null : figures.overshoot * 100,
    gain:
      figures === null
        ? null
        : {
            dc: figures.dc,
            f_1dB_Hz: edge(figures.f1, step),
            f_3dB_Hz: edge(figures.f3, step),
            f_6dB_Hz: edge(figures.f6, step),
          },
    enbw_Hz: figures === null ? null : figures.noiseBandwidth / step,
    response: figures === null || interval === null ? null : response(planned, interval),
    step:
      design.taps === null || design.taps.length < 2
        ? null
        : stepAnswer(design.taps, design.delay.samples, step),
    folds: design.keepEvery > 1 && interval !== null ? mainsFolds(plan, planned, interval) : [],
    channels: {},
    alias: design.alias === null ? null : aliasAccount(planned, []),
    notes: { ...design.notes },
  };
}

/** The value at t uses data up to t + this: an even centred window reaches half a sample less than its index. */
export function lookAhead(planned: PlannedStage, interval_s: number): number {
  const { design } = planned;
  const shift =
    design.grid !== planned.signalIn.grid && design.keepEvery === 1 && planned.signalIn.grid !== null;
  const half = shift && design.grid.offset !== planned.signalIn.grid!.offset ? 0.5 : 0;
  return ((design.reach?.after ?? 0) - half) * interval_s;
}

/** The same with what was measured. */
export function stageAccount(
  plan: Plan,
  planned: PlannedStage,
  index: number,
  results: readonly ChannelResult[],
): StageAccount {
  const account = stageDesignAccount(plan, planned);
  const channels: Record<string, ChannelAccount> = {};
  const notes: Record<string, unknown> = { ...account.notes };
  const trends: Record<string, unknown> = {};
  for (const [c, channel] of plan.channels.entries()) {
    const measure = results[c]!.measures[index]!;
    channels[channel.name] = channelAccount(plan, planned, measure, channel.unit);
    const learned = results[c]!.learned.get(index);
    if (learned !== undefined) trends[channel.name] = planned.design.learnedNotes?.(learned, channel.unit);
  }
  const turned = turnedPower(planned, results, index, plan);
  if (turned !== null) notes["power_turned_upside_down_pct"] = turned;
  if (Object.keys(trends).length > 0) notes["trend"] = trends;
  const first = results[0]!;
  const before = index === 0 ? first.gridCounts.samples : first.measures[index - 1]!.counts.samples;
  return {
    ...account,
    in: { ...account.in, samples: before },
    out: { ...account.out, samples: first.measures[index]!.counts.samples },
    channels,
    alias:
      planned.design.alias === null
        ? null
        : aliasAccount(
            planned,
            plan.channels.map((channel, c) => ({
              channel: channel.name,
              measure: results[c]!.measures[index]!.alias?.measure() ?? null,
            })),
          ),
    notes,
  };
}

/** The stage that puts rows onto the grid: no input on the same grid, so nothing is said to be removed. */
export function gridStageAccount(
  plan: Plan,
  results: readonly ChannelResult[],
  rows: number,
  nominal_s: number,
): StageAccount {
  const { gridStage } = plan;
  const account = stageDesignAccount(plan, gridStage);
  const channels: Record<string, ChannelAccount> = {};
  const effect: Record<string, unknown> = {};
  const { interpolation } = gridStage.design;
  for (const [c, channel] of plan.channels.entries()) {
    const result = results[c]!;
    channels[channel.name] = { ...unmeasured(channel.unit), ...counted(result.gridCounts) };
    const measured = result.interpolation;
    effect[channel.name] = {
      between: interpolation.between,
      ...measured,
      row_interval_s: nominal_s,
      mean_gain: shares(nominal_s).map(({ share, f_Hz }) => {
        const power = interpolation.meanPowerGain(measured, f_Hz, nominal_s);
        return {
          frequency_Hz: f_Hz,
          share_of_rate: share,
          gain_dB: power === null ? null : 10 * Math.log10(Math.max(1e-40, power)),
        };
      }),
    };
  }
  return {
    ...account,
    in: { interval_s: null, samples: rows },
    out: { ...account.out, samples: results[0]!.gridCounts.samples },
    channels,
    notes: { ...account.notes, interpolation: effect },
  };
}

/** For an equal mean: share of each channel's power where it turns the phase round. */
function turnedPower(
  planned: PlannedStage,
  results: readonly ChannelResult[],
  index: number,
  plan: Plan,
): Record<string, number> | null {
  const { taps } = planned.design;
  if (planned.stage !== "moving-average" || taps === null || !taps.every((w) => w === taps[0])) return null;
  const found: Record<string, number> = {};
  for (const [c, channel] of plan.channels.entries()) {
    const { spectra, cross } = results[c]!.measures[index]!;
    const d = spectra === null || cross === null ? null : densities(spectra.plan, cross);
    if (d !== null)
      found[channel.name] = turnedPower_pct(d, taps.length, intervalSeconds(planned.signalIn.grid!));
  }
  return Object.keys(found).length === 0 ? null : found;
}

const shares = (interval_s: number) =>
  [0.05, 0.1, 0.2, 0.3, 0.4, 0.5].map((share) => ({ share, f_Hz: share / interval_s }));

function response(planned: PlannedStage, interval_s: number): StageAccount["response"] {
  const f = Array.from({ length: RESPONSE_POINTS + 1 }, (_, i) => i / (2 * RESPONSE_POINTS));
  return {
    frequency_Hz: f.map((x) => x / interval_s),
    gain_dB: f.map((x) => Math.max(-400, decibels(stageGain(planned, x)))),
  };
}

/** Running sum of the taps, at no more than some hundred places, with the values around it. */
function stepAnswer(
  taps: Float64Array,
  delay: number,
  interval_s: number,
): NonNullable<StageAccount["step"]> {
  const every = Math.max(1, Math.ceil(taps.length / RESPONSE_POINTS));
  const time_s: number[] = [];
  const value: number[] = [];
  let sum = 0;
  for (let n = -1; n <= taps.length; n++) {
    sum += taps[n] ?? 0;
    if ((n + 1) % every !== 0 && n !== taps.length) continue;
    time_s.push((n - delay) * interval_s);
    value.push(sum);
  }
  return { time_s, value };
}

/** Where mains hum and its harmonics land, as far as the stage's input can hold them. */
function mainsFolds(plan: Plan, planned: PlannedStage, interval_s: number): StageAccount["folds"] {
  const rate = 1 / interval_s;
  const newRate = rate / planned.design.keepEvery;
  return MAINS_Hz.flatMap((mains) => Array.from({ length: HARMONICS }, (_, h) => mains * (h + 1)))
    .filter((f) => f > newRate / 2 && f <= rate / 2)
    .map((f) => {
      const landed = foldedFrequency(f, newRate);
      return {
        frequency_Hz: f,
        lands_at_Hz: landed.frequency,
        gain_dB: decibels(upstreamGain(plan, planned, f)),
        inverted: landed.inverted,
      };
    });
}

/** Gain at f of everything from the grid's start to this stage's own filter, first channel that it works on. */
function upstreamGain(plan: Plan, planned: PlannedStage, f_Hz: number): number {
  let gain = 1;
  for (const stage of plan.stages) {
    const interval = intervalSeconds(stage.signalIn.grid!);
    if (stage.selected.includes(planned.selected[0]!) && f_Hz * interval <= 0.5)
      gain *= stageGain(stage, f_Hz * interval);
    if (stage === planned) break;
  }
  return gain;
}

function aliasAccount(
  planned: PlannedStage,
  measured: readonly { channel: string; measure: AliasMeasure | null }[],
): AliasAccount {
  const alias = planned.design.alias!;
  let worst: { channel: string; measure: AliasMeasure } | null = null;
  for (const { channel, measure } of measured)
    if (measure !== null && (worst === null || measure.ratio_dB > worst.measure.ratio_dB))
      worst = { channel, measure };
  return {
    anti_alias: alias.antiAlias,
    accepted: alias.accepted,
    kept_to_Hz: alias.keptTo_Hz,
    design_worst_gain_dB: alias.worstGain_dB,
    design_source_Hz: alias.source_Hz,
    design_met: alias.met,
    ratio_dB: worst?.measure.ratio_dB ?? null,
    worst_channel: worst?.channel ?? null,
    worst_band: worst?.measure.band ?? null,
    source_Hz: worst?.measure.source_Hz ?? null,
    lands_at_Hz: worst?.measure.landsAt_Hz ?? null,
    limit_dB: alias.limit_dB,
    met: worst === null ? alias.met : worst.measure.ratio_dB <= alias.limit_dB,
  };
}
