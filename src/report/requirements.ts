/** Requirements of the pipeline, judged on the design and, where a report stage measured it, on the data. */
import type { ChannelResult } from "../engine/run-chain.ts";
import type { Plan } from "../pipeline/plan-types.ts";
import type { Requirements } from "../pipeline/schema.ts";
import { intervalSeconds } from "../signal/grid.ts";
import { bandPower } from "../signal/welch.ts";
import { inHertz } from "../stages/parts/frequencies.ts";
import type { RequirementAccount } from "./account-format.ts";
import { chainExtremes } from "./chain-response.ts";
import { densities } from "./spectrum-account.ts";

/** What leakage and the ends of segments may add to a measured band gain, dB. */
const MEASURED_ALLOWANCE_dB = 0.5;

export function judgeRequirements(
  plan: Plan,
  requirements: Requirements,
  results: readonly ChannelResult[] | null,
): RequirementAccount[] {
  const first = intervalSeconds(plan.gridStage.design.grid);
  const last = intervalSeconds(plan.outGrid);
  const out: RequirementAccount[] = [];
  for (const [c, channel] of plan.channels.entries()) {
    for (const keep of requirements.keep ?? []) {
      const from = inHertz(keep.from, first);
      const to = inHertz(keep.to, first);
      const { highest, lowest } = chainExtremes(plan, c, from, Math.max(from, Math.min(to, 0.5 / first)));
      const worst = Math.max(Math.abs(dB(highest)), Math.abs(dB(lowest)));
      const fits = to <= 0.5 / last;
      const measured = results === null ? null : measuredGain(plan, c, results[c]!, from, to);
      const off = measured === null ? null : Math.abs(measured);
      const met =
        fits && worst <= keep.ripple + 1e-9 && (off === null || off <= keep.ripple + MEASURED_ALLOWANCE_dB);
      out.push({
        requirement: `keep ${hz(from)} to ${hz(to)} within ${keep.ripple} dB`,
        channel: channel.name,
        predicted: fits
          ? `largest departure ${show(worst)} dB`
          : `not below the clean series' Nyquist frequency, ${hz(0.5 / last)}`,
        measured: measured === null ? null : `${show(measured)} dB over the band`,
        margin: `${show(keep.ripple - worst)} dB`,
        met,
      });
    }
    for (const remove of requirements.remove ?? []) {
      const from = inHertz(remove.from, first);
      const to = inHertz(remove.to, first);
      const seen = Math.min(to, 0.5 / first);
      const worst = seen > from ? dB(chainExtremes(plan, c, from, seen).highest) : null;
      const measured =
        results === null || worst === null ? null : measuredGain(plan, c, results[c]!, from, seen);
      const met =
        worst !== null &&
        worst <= -remove.attenuation + 1e-9 &&
        (measured === null || measured <= -remove.attenuation + MEASURED_ALLOWANCE_dB);
      out.push({
        requirement: `remove ${hz(from)} to ${hz(to)} by ${remove.attenuation} dB`,
        channel: channel.name,
        predicted:
          worst === null
            ? `above the grid's Nyquist frequency, ${hz(0.5 / first)}: not to be judged`
            : `at least ${show(-worst)} dB`,
        measured: measured === null ? null : `${show(-measured)} dB over the band`,
        margin: worst === null ? null : `${show(-worst - remove.attenuation)} dB`,
        met,
      });
    }
  }
  if (requirements.delay !== undefined) {
    const most = requirements.delay.seconds;
    const delay = chainDelay(plan);
    out.push({
      requirement: `delay at most ${most} s`,
      channel: null,
      predicted: `${show(delay)} s`,
      measured: null,
      margin: `${show(most - Math.abs(delay))} s`,
      met: Math.abs(delay) <= most + 1e-9,
    });
  }
  return out;
}

/** What is left of the delay at the end of the chain, seconds; the largest over the channels. */
export function chainDelay(plan: Plan): number {
  const perChannel = plan.channels.map((_, c) =>
    plan.stages
      .filter((s) => s.selected.includes(c))
      .reduce(
        (sum, s) =>
          sum + s.design.delay.samples * intervalSeconds(s.signalIn.grid!) - s.design.delay.compensated_s,
        0,
      ),
  );
  return perChannel.reduce((a, b) => (Math.abs(b) > Math.abs(a) ? b : a), 0);
}

/**
 * Measured gain over a band, dB: the product of the power ratios of the stages that were accounted for.
 * null when a stage that filters was not measured, or its segments are too short to show its filter.
 */
function measuredGain(
  plan: Plan,
  channel: number,
  result: ChannelResult,
  from: number,
  to: number,
): number | null {
  let gain_dB = 0;
  let any = false;
  for (const [i, planned] of plan.stages.entries()) {
    const interval = intervalSeconds(planned.signalIn.grid!);
    if (!planned.selected.includes(channel) || planned.design.taps === null || from * interval >= 0.5)
      continue;
    const measure = result.measures[i]!;
    const d =
      measure.spectra === null || measure.cross === null
        ? null
        : densities(measure.spectra.plan, measure.cross);
    if (d === null || d.plan.segment < 2 * planned.design.taps.length) return null;
    const top = Math.min(to, 0.5 / interval);
    const p_in = bandPower(d.xx, d.plan.resolution_Hz, from, top);
    const p_out = bandPower(d.yy, d.plan.resolution_Hz, from, top);
    if (!(p_in > 0)) return null;
    gain_dB += p_out > 0 ? 10 * Math.log10(p_out / p_in) : -400;
    any = true;
  }
  return any ? gain_dB : null;
}

const dB = (gain: number): number => (gain > 1e-20 ? 20 * Math.log10(gain) : -400);
const hz = (f: number): string => `${Number(f.toPrecision(4))} Hz`;
const show = (x: number): string => String(Number((Object.is(x, -0) ? 0 : x).toPrecision(4)));
