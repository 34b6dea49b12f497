/**
 * Records whose content is known exactly: every figure of the account against its closed form. Tolerances come
 * from the statistics of the estimate (stated at each) or from rounding.
 */
import { describe, expect, it } from "vitest";
import type { ChannelAccount } from "../../src/report/account-format.ts";
import { channelAccount } from "../../src/report/channel-account.ts";
import { meanGain } from "../../src/signal/filter-figures.ts";
import { type Entry, evenRows, planOf, run } from "./harness.ts";

const GRID: Entry = { stage: "resample", interval: "1 s" };

/** Lehmer generator (16807, 2^31 - 1) and the sum of 12 draws less 6: unit variance, nearly Gaussian. */
function gaussian(seed: number): () => number {
  let n = seed;
  return () => {
    let sum = -6;
    for (let i = 0; i < 12; i++) {
      n = (n * 16807) % 2147483647;
      sum += n / 2147483647;
    }
    return sum;
  };
}

/** Account of the first stage after the grid, channel x. */
function account(stage: Entry, x: Float64Array, report: Record<string, unknown> = {}): ChannelAccount {
  const plan = planOf([GRID, stage, { stage: "report", ...report }]);
  const { results } = run(plan, evenRows(x, 1_000_000));
  return channelAccount(plan, plan.stages[0]!, results[0]!.measures[0]!, "m");
}

const MEAN: Entry = { stage: "moving-average", points: 9 };

describe("known content", () => {
  it("white noise through a mean of N: the variance kept is 1/N, removed 1 - 1/N", () => {
    const draw = gaussian(20310304);
    const n = 200_000;
    const c = account(MEAN, Float64Array.from({ length: n }, draw), { resolution: "2 mHz" });
    // Standard error of a variance over n samples is sqrt(2/n) of it; the smoothed one has about n/9 independent.
    expect(Math.abs(c.rms_in! ** 2 - 1)).toBeLessThan(4 * Math.sqrt(2 / n));
    expect(Math.abs(c.rms_out! ** 2 * 9 - 1)).toBeLessThan(4 * Math.sqrt(18 / n));
    expect(c.variance_removed_pct! / 100).toBeCloseTo(1 - 1 / 9, 1);
    // r = x - y, and the mean's response is real: |1 - H|^2 integrates to 1 - 2/9 + 1/9.
    expect(Math.abs(c.rms_removed! ** 2 - (1 - 1 / 9))).toBeLessThan(4 * Math.sqrt(2 / n));
    const all = c.bands[0]!;
    expect(Math.abs(all.p_in - 1)).toBeLessThan(4 * Math.sqrt(2 / n));
    expect(all.as_predicted).toBe(true);
    expect(all.finding).toBe("removed");
    expect(c.tones).toEqual([]);
    // Flat density: 1 unit squared over half a Hz, one-sided.
    const s = c.spectrum!;
    const mean = s.psd_in.reduce((a, b) => a + b, 0) / s.psd_in.length;
    expect(mean).toBeGreaterThan(1.9);
    expect(mean).toBeLessThan(2.1);
  });

  it("a tone: amplitude, frequency and gain to their closed forms, and where it lands", () => {
    const draw = gaussian(7);
    const f = 0.2137;
    const a = 0.5;
    const x = Float64Array.from(
      { length: 60_000 },
      (_, i) => 10 + a * Math.sin(2 * Math.PI * f * i + 1) + 0.01 * draw(),
    );
    const c = account(MEAN, x, { resolution: "1 mHz" });
    const tone = c.tones[0]!;
    expect(Math.abs(tone.frequency_Hz - f)).toBeLessThan(c.spectrum!.resolution_Hz / 2);
    expect(Math.abs(tone.amplitude / a - 1)).toBeLessThan(0.01);
    // The gain is told at the nearest bin.
    expect(Math.abs(10 ** (tone.gain_dB / 20) - Math.abs(meanGain(9, f)))).toBeLessThan(0.01);
    const slow = account({ stage: "decimate", by: 4 }, x, { resolution: "1 mHz" });
    expect(slow.tones[0]!.folds).toBe(true);
    expect(slow.tones[0]!.lands_at_Hz).toBeCloseTo(0.25 - f, 3);
  });

  it("a straight line on noise: the trend's variance is what detrend removes", () => {
    const draw = gaussian(3);
    const n = 10_000;
    const slope = 0.001;
    const x = Float64Array.from({ length: n }, (_, i) => 50 + slope * i + draw());
    const c = account({ stage: "detrend", degree: 1 }, x);
    // Variance of slope * i over n samples: slope^2 (n^2 - 1) / 12.
    const expected = (slope ** 2 * (n ** 2 - 1)) / 12;
    expect(Math.abs(c.rms_removed! ** 2 / expected - 1)).toBeLessThan(
      (8 * Math.sqrt(12 / n)) / Math.sqrt(expected),
    );
    expect(Math.abs(c.rms_out! - 1)).toBeLessThan(4 / Math.sqrt(2 * n));
    expect(c.mean_out!).toBeCloseTo(0, 12);
  });

  it("a step: the largest removal stands at the step, with its known size", () => {
    const x = Float64Array.from({ length: 2001 }, (_, i) => (i < 1000 ? 0 : 9));
    const c = account(MEAN, x);
    // At the last sample before the step the mean of 9 holds 4 of the 9s: removed 0 - 4; at the step 9 - 5.
    const [event] = c.removal!.events;
    expect(Math.abs(event!.removed)).toBe(4);
    expect(["1970-01-01T00:16:39Z", "1970-01-01T00:16:40Z"]).toContain(event!.time);
  });

  it("a pulse of N samples under a mean of N keeps its height at one sample; a shorter one loses by its share", () => {
    for (const [length, left] of [
      [9, 1],
      [3, 1 / 3],
      [1, 1 / 9],
    ] as const) {
      const x = new Float64Array(500);
      x.fill(1, 250, 250 + length);
      const c = account(MEAN, x);
      expect(c.extremes!.height_lost!).toBeCloseTo(1 - left, 12);
    }
  });

  it("an inverting band is shown as such: more is removed than was there", () => {
    // Between its first two nulls a mean of 9 turns the phase round.
    const f = 1.5 / 9;
    const x = Float64Array.from({ length: 20_000 }, (_, i) => Math.sin(2 * Math.PI * f * i));
    const c = account(MEAN, x, { bands: { lobe: { from: "0.15 Hz", to: "0.18 Hz" } } });
    const h = meanGain(9, f);
    expect(h).toBeLessThan(0);
    const lobe = c.bands.find((b) => b.name === "lobe")!;
    expect(lobe.p_removed / lobe.p_in).toBeCloseTo((1 - h) ** 2, 3);
    expect(lobe.cross).toBeLessThan(0);
  });

  it("an aligned identity and a pure delay remove nothing, whatever the record", () => {
    const draw = gaussian(11);
    const x = Float64Array.from({ length: 3000 }, draw);
    const same = account({ stage: "fir", coefficients: [1] }, x);
    expect(same.rms_removed).toBe(0);
    expect(same.bands[0]!.finding).toBe("kept");
    const late = account({ stage: "fir", coefficients: [0, 0, 0, 1], reach: "past-only" }, x);
    expect(late.rms_removed).toBe(0);
    expect(late.delay_measured!.delay_s).toBeCloseTo(3, 6);
  });

  it("degrees of freedom: the scatter of a band's estimates over many records is what they promise", () => {
    // 200 records of white noise; a bin's estimate times nu / its mean is chi-square, so its relative variance is 2 / nu.
    const estimates: number[] = [];
    let nu = 0;
    for (let seed = 1; seed <= 200; seed++) {
      const c = account(MEAN, Float64Array.from({ length: 1200 }, gaussian(seed * 7919)), {
        resolution: "8 mHz",
      });
      nu = c.spectrum!.degrees_of_freedom;
      estimates.push(c.spectrum!.psd_in[20]!);
    }
    const mean = estimates.reduce((a, b) => a + b, 0) / estimates.length;
    const variance = estimates.reduce((s, e) => s + (e - mean) ** 2, 0) / (estimates.length - 1) / mean ** 2;
    // The standard error of a variance from 200 draws is about 10 % (more with the kurtosis of chi-square).
    expect(variance / (2 / nu)).toBeGreaterThan(0.65);
    expect(variance / (2 / nu)).toBeLessThan(1.45);
  });
});
