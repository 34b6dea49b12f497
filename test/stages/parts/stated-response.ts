import { expect } from "vitest";
import type { Plan, PlannedStage } from "../../../src/pipeline/plan-types.ts";
import type { StageAccount } from "../../../src/report/account-format.ts";
import { stageDesignAccount } from "../../../src/report/stage-account.ts";
import { intervalSeconds } from "../../../src/signal/grid.ts";
import { gainAt, responseAt } from "../../../src/signal/response.ts";
import { throughKernel } from "./at-work.ts";
import { complexGain } from "./complex-gain.ts";

/** Samples of each sine wave; frequencies away from 0 and 0.5, where a fit has nothing to hold on to. */
const N = 900;
const FREQUENCIES = [0.0113, 0.05, 0.1237, 0.1871, 0.2503, 0.3331, 0.4127, 0.4891];
const PHASE = 0.7;

/** Sine waves through the kernel of a filtering stage against its taps and its account. */
export function expectStatedResponse(plan: Plan, planned: PlannedStage, first: number): void {
  const { delay } = planned.design;
  const taps = planned.design.taps!;
  const scale = taps.reduce((sum, w) => sum + Math.abs(w), 0);
  const measured = sineGain(planned, first);
  for (const f of FREQUENCIES) {
    const { re, im } = measured(f);
    const stated = responseAt(taps, f);
    // The window reaches `indexSamples` past the output's index.
    const turn = 2 * Math.PI * f * delay.indexSamples;
    const wanted = {
      re: stated.re * Math.cos(turn) - stated.im * Math.sin(turn),
      im: stated.re * Math.sin(turn) + stated.im * Math.cos(turn),
    };
    expect(Math.hypot(re - wanted.re, im - wanted.im)).toBeLessThan(1e-9 * scale);
  }
  if (taps.length < 2) return;
  const interval = intervalSeconds(planned.signalIn.grid!);
  const account = stageDesignAccount(plan, planned);
  const gainAtHz = (hz: number) => {
    const { re, im } = measured(hz * interval);
    return Math.hypot(re, im);
  };
  account.response!.frequency_Hz.forEach((hz, i) => {
    if (i % 57 !== 3) return;
    const stated = 10 ** (account.response!.gain_dB[i]! / 20);
    expect(Math.abs(stated - gainAtHz(hz))).toBeLessThan(1e-9 * scale);
  });
  const flat = throughKernel(planned, first, new Float64Array(N).fill(1)).y;
  expect(Math.abs(flat[N / 2]! - account.gain!.dc)).toBeLessThan(1e-12 * scale);
  expectEdges(account.gain!, gainAtHz, taps);
  expectNoiseBandwidth(account.enbw_Hz! * interval, planned, first);
}

function sineGain(planned: PlannedStage, first: number): (f: number) => { re: number; im: number } {
  const full = Math.ceil(planned.design.end_s / intervalSeconds(planned.signalIn.grid!) + 1);
  return (f) => {
    const wave = Float64Array.from({ length: N }, (_, i) =>
      Math.cos(2 * Math.PI * ((f * (first + i)) % 1) + PHASE),
    );
    const out = throughKernel(planned, first, wave);
    return complexGain(out.first + full, out.y.subarray(full, out.y.length - full), f, PHASE);
  };
}

/** At every edge the gain stands as far below the largest as its name says. */
function expectEdges(
  gain: NonNullable<StageAccount["gain"]>,
  gainAtHz: (hz: number) => number,
  taps: Float64Array,
): void {
  const tops = (
    [
      [1, gain.f_1dB_Hz],
      [3, gain.f_3dB_Hz],
      [6, gain.f_6dB_Hz],
    ] as const
  ).flatMap(([dB, edges]) =>
    edges === null ? [] : [edges].flat().map((hz) => gainAtHz(hz) * 10 ** (dB / 20)),
  );
  for (const top of tops) expect(Math.abs(top / tops[0]! - 1)).toBeLessThan(1e-9);
  // On a grid the largest gain is met to some 1e-5.
  if (tops.length > 0) expect(Math.abs(tops[0]! / peakOnGrid(taps) - 1)).toBeLessThan(2e-5);
}

function expectNoiseBandwidth(stated: number, planned: PlannedStage, first: number): void {
  const impulse = new Float64Array(N);
  impulse[N / 2] = 1;
  const { y } = throughKernel(planned, first, impulse);
  const power = y.reduce((sum, v) => sum + (Number.isNaN(v) ? 0 : v * v), 0);
  const peak = peakOnGrid(planned.design.taps!);
  expect(Math.abs((stated * 2 * peak * peak) / power - 1)).toBeLessThan(1e-4);
}

const peakOnGrid = (taps: Float64Array): number =>
  Math.max(...Array.from({ length: 4001 }, (_, i) => gainAt(taps, i / 8000)));
