/**
 * What a moving average does badly, in the trade's words, and which designed filter does better at the same
 * noise bandwidth or at the same delay, with the figures side by side.
 * Closed forms of the mean of N: nulls at k / N, first side lobe near 1.43 / N at -13.3 dB for long means (the
 * peak of |sin x / x| at x = 4.4934, common practice), turned phase between the first and second null.
 */
import type { Plan, PlannedStage } from "../pipeline/plan-types.ts";
import { filterFigures, meanGain } from "../signal/filter-figures.ts";
import { gainAtBins } from "../signal/gain-at-bins.ts";
import { intervalSeconds } from "../signal/grid.ts";
import { designWindowedSinc } from "../signal/windowed-sinc.ts";
import { type Densities, decibels } from "./spectrum-account.ts";

export interface Candidate {
  /** As it would stand in the pipeline file. */
  readonly write: string;
  readonly taps: number;
  readonly delay_s: number;
  readonly noiseBandwidth_Hz: number;
  readonly f3_Hz: number | null;
  /** Highest gain beyond the filter's own first minimum. */
  readonly sideLobe_dB: number;
  readonly overshoot_pct: number;
}

export interface Advice {
  readonly place: number;
  readonly points: number;
  /** What the mean does badly, a sentence each. */
  readonly remarks: readonly string[];
  readonly mean: Candidate;
  readonly sameNoise: Candidate;
  readonly sameDelay: Candidate;
}

/** Shortest mean that has anything to be said about. */
const FEWEST = 4;
const LONGEST = 4001;

export function adviseOnMeans(plan: Plan): Advice[] {
  return plan.stages.filter(isEqualMean).map((stage) => advise(stage));
}

function isEqualMean({ stage, design }: PlannedStage): boolean {
  const { taps } = design;
  return (
    stage === "moving-average" &&
    taps !== null &&
    taps.length >= FEWEST &&
    taps.length <= LONGEST &&
    taps.every((w) => w === taps[0])
  );
}

function advise(planned: PlannedStage): Advice {
  const n = planned.design.taps!.length;
  const interval = intervalSeconds(planned.signalIn.grid!);
  const hz = (f: number) => f / interval;
  const lobe = firstSideLobe(n);
  const remarks = [
    `Its first side lobe lets ${decibels(lobe.gain).toFixed(1)} dB through near ${text(hz(lobe.frequency))} Hz.`,
    `Between ${text(hz(1 / n))} and ${text(hz(Math.min(0.5, 2 / n)))} Hz, and in every second band above, it turns waves upside down: crests come out as troughs.`,
  ];
  if (n % 2 === 0 && planned.design.grid.offset !== planned.signalIn.grid!.offset)
    remarks.push(
      `Its even length puts every value ${text(interval / 2)} s off the grid; ${n + 1} points would not.`,
    );
  const figuresOf = (taps: Float64Array, write: string): Candidate => {
    const f = filterFigures(taps);
    return {
      write,
      taps: taps.length,
      delay_s: ((taps.length - 1) / 2) * interval,
      noiseBandwidth_Hz: hz(f.noiseBandwidth),
      f3_Hz: f.f3[0] === undefined ? null : hz(f.f3[0]),
      sideLobe_dB: decibels(highestSideLobe(taps)),
      overshoot_pct: (f.overshoot ?? 0) * 100,
    };
  };
  const write = (taps: number, edge: number) =>
    `{ stage: fir, shape: low-pass, taps: ${taps}, edge: ${text(hz(edge))} Hz, window: hamming }`;
  // A Hamming low-pass long enough that its transition ends at the mean's first null: 3.3 / taps wide on each side
  // of the edge in all (common practice), so about seven times the mean's length reaches the same noise bandwidth.
  const long = oddFrom(6.6 * n);
  const edge = edgeForNoise(long, 1 / (2 * n));
  const short = oddFrom(n);
  return {
    place: planned.place,
    points: n,
    remarks,
    mean: figuresOf(planned.design.taps!, `{ stage: moving-average, points: ${n} }`),
    sameNoise: figuresOf(low(long, edge), write(long, edge)),
    sameDelay: figuresOf(low(short, 0.5 / n), write(short, 0.5 / n)),
  };
}

const oddFrom = (x: number): number => 2 * Math.floor(x / 2) + 1;

const low = (taps: number, edge: number): Float64Array =>
  designWindowedSinc({ taps, shape: "low-pass", edges: [edge], window: "hamming" });

/** The -6 dB edge at which a Hamming low-pass has the noise bandwidth asked for, by bisection. */
function edgeForNoise(taps: number, bandwidth: number): number {
  let from = 0.2 * bandwidth;
  let to = Math.min(0.49, 3 * bandwidth);
  for (let i = 0; i < 30; i++) {
    const middle = (from + to) / 2;
    if (filterFigures(low(taps, middle)).noiseBandwidth < bandwidth) from = middle;
    else to = middle;
  }
  return Number(((from + to) / 2).toPrecision(4));
}

/** Highest |H| beyond its first minimum, on 32 points a tap. */
function highestSideLobe(taps: Float64Array): number {
  const gains = gainAtBins(taps, 2 ** Math.ceil(Math.log2(64 * taps.length)));
  let k = 1;
  // Ripple in the passband has minima too: the first one below -20 dB is meant.
  while (k < gains.length - 1 && (gains[k]! > 0.1 * gains[0]! || gains[k]! <= gains[k - 1]!)) k++;
  let highest = 0;
  for (; k < gains.length; k++) highest = Math.max(highest, gains[k]!);
  return highest;
}

function firstSideLobe(n: number): { gain: number; frequency: number } {
  let best = { gain: 0, frequency: 0.5 };
  const steps = 400;
  for (let i = 1; i < steps; i++) {
    const frequency = Math.min(0.5, (1 + i / steps) / n);
    const gain = Math.abs(meanGain(n, frequency));
    if (gain > best.gain) best = { gain, frequency };
  }
  return best;
}

/** Share of a channel's power that lies where a mean of n turns the phase round, percent. */
export function turnedPower_pct(d: Densities, n: number, interval_s: number): number {
  let turned = 0;
  let total = 0;
  for (let k = 1; k < d.xx.length; k++) {
    total += d.xx[k]!;
    if (meanGain(n, d.plan.frequency(k) * interval_s) < 0) turned += d.xx[k]!;
  }
  return total > 0 ? (100 * turned) / total : 0;
}

const text = (x: number): string => String(Number(x.toPrecision(4)));
