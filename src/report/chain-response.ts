/** Gain of all stages together for one channel, at one frequency and at its extremes over a band. */
import type { Plan, PlannedStage } from "../pipeline/plan-types.ts";
import { meanGain } from "../signal/filter-figures.ts";
import { climb } from "../signal/gain-curve.ts";
import { intervalSeconds } from "../signal/grid.ts";
import { gainAt } from "../signal/response.ts";
import { gainsOnLine } from "../signal/response-on-line.ts";

/** Points to each stretch of 1 / (length of the combined impulse response), the distance between its nulls. */
const POINTS_A_LOBE = 16;
const LEAST_POINTS = 64;
/** Extremes of the sampled gain that are followed up on the direct sum. */
const CLIMBED = 4;

/** |H| of one stage at f cycles/sample. */
export function stageGain(planned: PlannedStage, f: number): number {
  const { taps } = planned.design;
  if (taps === null) return 1;
  return isMean(taps) ? Math.abs(meanGain(taps.length, f)) : gainAt(taps, f);
}

const isMean = (taps: Float64Array): boolean => taps.length > 2 && taps.every((w) => w === taps[0]);

/**
 * Largest and smallest gain of the whole chain on [from_Hz, to_Hz]: of the product over the stages whose input
 * still holds the frequency. Above a rate's half, what folds has been through the filters before the fold.
 * Sampled more densely than the combined response has lobes: a few hundred points could all fall on nulls.
 * @param to_Hz  at most half the rate of the chain's first grid
 */
export function chainExtremes(
  plan: Plan,
  channel: number,
  from_Hz: number,
  to_Hz: number,
): { readonly highest: number; readonly lowest: number } {
  const filters = plan.stages
    .filter((s) => s.selected.includes(channel) && s.design.taps !== null)
    .map((planned) => ({ planned, interval: intervalSeconds(planned.signalIn.grid!) }));
  // Which stages count changes at their rates' halves, so each stretch between them is sought by itself.
  const cuts = [...new Set(filters.map((f) => 0.5 / f.interval))]
    .filter((f) => f > from_Hz && f < to_Hz)
    .sort((a, b) => a - b);
  const edges = [from_Hz, ...cuts, to_Hz];
  let highest = Number.NEGATIVE_INFINITY;
  let lowest = Number.POSITIVE_INFINITY;
  for (let i = 0; i + 1 < edges.length; i++) {
    const [from, to] = [edges[i]!, edges[i + 1]!];
    const here = filters.filter((f) => ((from + to) / 2) * f.interval <= 0.5);
    const found = extremesOf(here, from, to);
    highest = Math.max(highest, found.highest);
    lowest = Math.min(lowest, found.lowest);
  }
  return { highest, lowest };
}

type Filters = readonly { readonly planned: PlannedStage; readonly interval: number }[];

function extremesOf(filters: Filters, from: number, to: number): { highest: number; lowest: number } {
  const exact = (f: number) =>
    filters.reduce((gain, s) => gain * stageGain(s.planned, Math.min(0.5, f * s.interval)), 1);
  if (!(to > from) || filters.length === 0) return { highest: exact(from), lowest: exact(from) };
  const length_s = filters.reduce((sum, s) => sum + s.planned.design.taps!.length * s.interval, 0);
  const count = LEAST_POINTS + Math.ceil((to - from) * length_s * POINTS_A_LOBE);
  const step = (to - from) / (count - 1);
  const sampled = new Float64Array(count).fill(1);
  for (const { planned, interval } of filters) {
    const taps = planned.design.taps!;
    if (isMean(taps))
      for (let m = 0; m < count; m++) sampled[m]! *= stageGain(planned, (from + m * step) * interval);
    else {
      const gains = gainsOnLine(taps, from * interval, step * interval, count);
      for (let m = 0; m < count; m++) sampled[m]! *= gains[m]!;
    }
  }
  const ends = [exact(from), exact(to)];
  const best = (sign: 1 | -1) =>
    outermost(sampled, sign).map((m) => {
      const at = (k: number) => Math.min(to, from + Math.min(count - 1, Math.max(0, k)) * step);
      return Math.max(
        sign * exact(at(m)),
        climb((f) => sign * exact(f), at(m - 1), at(m), at(m + 1), 1e-7).value,
      );
    });
  return { highest: Math.max(...ends, ...best(1)), lowest: Math.min(...ends, ...best(-1).map((v) => -v)) };
}

/** Places of the largest (sign 1) or smallest (-1) local extremes inside a sampled curve. */
function outermost(curve: Float64Array, sign: 1 | -1): number[] {
  const found: number[] = [];
  for (let m = 1; m + 1 < curve.length; m++) {
    const v = sign * curve[m]!;
    if (v < sign * curve[m - 1]! || v < sign * curve[m + 1]!) continue;
    if (found.length === CLIMBED && v <= sign * curve[found[CLIMBED - 1]!]!) continue;
    let place = found.length;
    while (place > 0 && sign * curve[found[place - 1]!]! < v) place--;
    found.splice(place, 0, m);
    if (found.length > CLIMBED) found.pop();
  }
  return found;
}
