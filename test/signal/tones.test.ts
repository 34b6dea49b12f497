import { describe, expect, it } from "vitest";
import { OverlapTail } from "../../src/signal/overlap-tail.ts";
import { medianShare, toneThreshold } from "../../src/signal/tone-threshold.ts";
import { findTones, ToneFinder, type ToneSearch } from "../../src/signal/tones.ts";
import { equivalentDegreesOfFreedom, SpectrumPlan, welch } from "../../src/signal/welch.ts";
import { WindowLeakage } from "../../src/signal/window-leakage.ts";
import { type WindowKind, windowCoefficients } from "../../src/signal/windows.ts";
import { nearGaussian, uniform } from "./noise.ts";

describe("tone threshold", () => {
  it("at two degrees of freedom has the closed form of order statistics of exponentials", () => {
    // The median of m exponentials is a sum of independent ones with rates m, m - 1, …; of that the chance
    // E[e^(-T median / ln 2)] is a product.
    for (const m of [3, 5, 21, 47, 93])
      for (const chance of [0.01, 1e-4, 1e-7]) {
        const t = toneThreshold(2, m, chance, (x) => Math.exp(-x));
        let product = 1;
        for (let i = 1; i <= (m + 1) / 2; i++) product *= (m - i + 1) / (m - i + 1 + t / Math.LN2);
        expect(Math.abs(product / chance - 1)).toBeLessThan(1e-5);
      }
    expect(medianShare(2)).toBeCloseTo(Math.LN2, 12);
  });
});

describe("tail of overlapping estimates", () => {
  // Source: the exact density of a sum of exponentials weighted with the eigenvalues of the correlation matrix
  // (partial fractions, 120 digits): segments, degrees of freedom, x, chance of exceeding x.
  it.each([
    ["hann", 3, 3.811, 1.12e-3],
    ["hann", 3, 7.401, 2.12e-7],
    ["hann", 7, 3.56, 1.42e-5],
    ["hann", 7, 4.426, 1.96e-7],
    ["hann", 31, 1.668, 1.08e-3],
    ["hann", 31, 2.269, 1.47e-7],
    ["rectangular", 3, 4.335, 1.43e-3],
    ["rectangular", 3, 8.794, 5.66e-7],
    ["rectangular", 7, 5.295, 4.38e-7],
    ["rectangular", 31, 2.577, 2.42e-7],
  ] as const)("%s, %i segments, x = %f", (window, segments, x, exact) => {
    const w = windowCoefficients(window, 256, "periodic");
    const tail = new OverlapTail(w, 128, equivalentDegreesOfFreedom(w, 128, segments));
    // x is given to four digits, which makes a per cent or so.
    expect(Math.abs(tail.above(x) / exact - 1)).toBeLessThan(0.025);
  });
  it("without overlap is chi-square's", () => {
    const w = windowCoefficients("hann", 256, "periodic");
    const tail = new OverlapTail(w, 256, 2);
    for (const x of [0, 0.5, 1, 1.04, 2, 5, 20]) expect(tail.above(x) / Math.exp(-x)).toBeCloseTo(1, 9);
  });
});

describe("window leakage", () => {
  it("bounds what a line shows in any bin, wherever between the bins it lies", () => {
    for (const window of ["rectangular", "triangular", "hann", "hamming", "blackman", "kaiser"] as const) {
      const plan = new SpectrumPlan({
        segment: 512,
        window,
        beta: 9,
        samplingRate_Hz: 1,
        takenOut: "nothing",
      });
      const leakage = new WindowLeakage(plan.windowCoefficients);
      const re = new Float64Array(plan.bins);
      const im = new Float64Array(plan.bins);
      const sine = { re: new Float64Array(plan.bins), im: new Float64Array(plan.bins) };
      for (const at of [100, 100.2, 100.37, 100.5]) {
        // A complex line, so that no image at the negative frequency joins in.
        const angle = Float64Array.from({ length: 512 }, (_, i) => (2 * Math.PI * at * i) / 512);
        plan.spectrum(angle.map(Math.cos), re, im);
        plan.spectrum(angle.map(Math.sin), sine.re, sine.im);
        const power = re.map((r, k) => (r - sine.im[k]!) ** 2 + (im[k]! + sine.re[k]!) ** 2);
        const peak = power[100]! >= power[101]! ? 100 : 101;
        for (let k = 0; k < plan.bins; k++)
          expect(power[k]!).toBeLessThanOrEqual(
            power[peak]! * (leakage.shareAt(Math.abs(k - peak)) * 1.02 + 1e-20),
          );
      }
    }
  });
  it("counts the bins that are alike: 35/18 for Hann", () => {
    expect(new WindowLeakage(windowCoefficients("hann", 4096, "periodic")).binsAlike).toBeCloseTo(35 / 18, 9);
    expect(new WindowLeakage(windowCoefficients("rectangular", 300, "periodic")).binsAlike).toBeCloseTo(
      1,
      12,
    );
  });
});

function searchFor(plan: SpectrumPlan, segments: number, falseAlarm: number): ToneSearch {
  return {
    resolution_Hz: plan.resolution_Hz,
    enbw_Hz: plan.enbw_Hz,
    degreesOfFreedom: equivalentDegreesOfFreedom(plan.windowCoefficients, plan.hop, segments),
    falseAlarm,
    windowCoefficients: plan.windowCoefficients,
    hop: plan.hop,
  };
}

/** Samples of so many half-overlapping segments. */
const lengthOf = (segment: number, segments: number) => segment + ((segments - 1) * segment) / 2;

describe("false alarms in white noise", () => {
  // Binomial: at the stated rate one record set in a thousand lies beyond 3.1 standard errors.
  it.each([
    ["hann", 256, 7, 1000],
    ["hann", 512, 1, 500],
    ["rectangular", 256, 3, 500],
    ["blackman", 128, 15, 500],
  ] as const)(
    "%s, %i samples a segment, %i segments: stay within the stated rate",
    (window, segment, segments, records) => {
      const falseAlarm = 0.05;
      const n = lengthOf(segment, segments);
      const noise = gaussian(20310303 + segment + segments, records * n);
      const plan = new SpectrumPlan({ segment, window, samplingRate_Hz: 10 });
      const finder = new ToneFinder(searchFor(plan, segments, falseAlarm));
      let alarms = 0;
      for (let r = 0; r < records; r++) {
        const { psd } = welch(noise.subarray(r * n, (r + 1) * n), { segment, window, samplingRate_Hz: 10 });
        if (finder.find(psd).length > 0) alarms++;
      }
      const expected = falseAlarm * records;
      expect(alarms).toBeLessThanOrEqual(expected + 3.1 * Math.sqrt(expected * (1 - falseAlarm)));
      // Nor is it silent for safety's sake.
      expect(alarms).toBeGreaterThan(expected / 10);
    },
  );
});

/** Gaussian noise whose tails are right (G. E. P. Box & M. E. Muller 1958), from the reference generator. */
function gaussian(seed: number, n: number): Float64Array {
  const u = uniform(seed, 2 * n);
  return Float64Array.from(
    { length: n },
    (_, i) => Math.sqrt(-2 * Math.log(u[2 * i]!)) * Math.cos(2 * Math.PI * u[2 * i + 1]!),
  );
}

describe("red noise", () => {
  it("of a random walk, drift and all, is not taken for tones", () => {
    const [segment, segments, records] = [256, 7, 300];
    const n = lengthOf(segment, segments);
    const plan = new SpectrumPlan({ segment, window: "hann", samplingRate_Hz: 1 });
    const finder = new ToneFinder(searchFor(plan, segments, 0.05));
    const noise = gaussian(5, records * n);
    let alarms = 0;
    for (let r = 0; r < records; r++) {
      let level = 0;
      const walk = noise.subarray(r * n, (r + 1) * n).map((v) => (level += v));
      const { psd } = welch(walk, { segment, window: "hann", samplingRate_Hz: 1 });
      if (finder.find(psd).length > 0) alarms++;
    }
    expect(alarms).toBeLessThanOrEqual(15 + 3.1 * Math.sqrt(15 * 0.95));
  });
});

describe("planted tones", () => {
  it.each([
    [256, 7, 0.001],
    [256, 31, 0.05],
    [512, 1, 0.001],
  ])(
    "%i samples, %i segments, rate %f: 3 dB above the threshold are found",
    (segment, segments, falseAlarm) => {
      const records = 200;
      const n = lengthOf(segment, segments);
      const rate = 100;
      const plan = new SpectrumPlan({ segment, window: "hann", samplingRate_Hz: rate });
      const finder = new ToneFinder(searchFor(plan, segments, falseAlarm));
      // White noise of variance 1 has the density 2 / rate; a tone on a bin has A^2 / 2 / enbw there.
      const wanted = 2 * finder.threshold(plan.bins) * (2 / rate);
      const amplitude = Math.sqrt(2 * wanted * plan.enbw_Hz);
      const noise = gaussian(77 + segments, records * n);
      const place = uniform(3, 2 * records);
      let found = 0;
      let sum = 0;
      for (let r = 0; r < records; r++) {
        const bin = 8 + Math.floor(place[2 * r]! * (segment / 2 - 16));
        const f = plan.frequency(bin);
        const phase = 2 * Math.PI * place[2 * r + 1]!;
        const x = noise
          .subarray(r * n, (r + 1) * n)
          .map((v, i) => v + amplitude * Math.cos((2 * Math.PI * f * i) / rate + phase));
        const { psd } = welch(x, { segment, window: "hann", samplingRate_Hz: rate });
        const tone = finder.find(psd).find((t) => Math.abs(t.frequency_Hz - f) < plan.resolution_Hz / 2);
        if (tone !== undefined) {
          found++;
          sum += tone.amplitude;
        }
      }
      expect(found / records).toBeGreaterThanOrEqual(0.97);
      expect(Math.abs(sum / found / amplitude - 1)).toBeLessThan(0.04);
    },
  );
});

/** Tones of given frequency (in bins of a segment of 256) and amplitude, in noise of variance noise^2. */
function look(lines: [number, number][], noise: number, window: WindowKind = "hann") {
  const segment = 256;
  const segments = 15;
  const g = nearGaussian(11, lengthOf(segment, segments));
  const x = g.map((v, i) => {
    let sum = noise * v;
    for (const [bin, a] of lines) sum += a * Math.cos((2 * Math.PI * bin * i) / segment + bin);
    return sum;
  });
  const { psd, plan } = welch(x, { segment, window, beta: 8, samplingRate_Hz: segment });
  return findTones(psd, searchFor(plan, segments, 0.001));
}

describe("strong lines", () => {
  const windows = ["rectangular", "triangular", "hann", "hamming", "blackman", "kaiser"] as const;
  it.each(windows)("%s: one line is one tone, whatever lies below it", (window) => {
    for (const bin of [5.2, 40, 40.3, 40.5, 100.01, 119.7])
      for (const noise of [0, 1e-8, 1e-4, 1e-2]) {
        const tones = look([[bin, 1]], noise, window);
        expect(tones.length).toBe(1);
        expect(Math.abs(tones[0]!.frequency_Hz - bin)).toBeLessThan(0.3);
        expect(Math.abs(tones[0]!.amplitude - 1)).toBeLessThan(window === "rectangular" ? 0.1 : 0.02);
      }
  });

  it("are sorted by amplitude, with weak ones found beside them", () => {
    const tones = look(
      [
        [20, 0.3],
        [50.4, 2],
        [58, 0.05],
        [90.25, 1],
      ],
      0.05,
    );
    expect(tones.map((t) => Math.round(2 * t.frequency_Hz) / 2)).toEqual([50.5, 90.5, 20, 58]);
    expect(tones[0]!.ratio).toBeGreaterThan(tones[3]!.ratio);
    for (const [i, a] of [2, 1, 0.3, 0.05].entries())
      expect(Math.abs(tones[i]!.amplitude / a - 1)).toBeLessThan(0.05);
  });

  it("in a comb of twelve are all found", () => {
    const comb = Array.from({ length: 12 }, (_, i): [number, number] => [9 * (i + 1), 1 / (i + 1)]);
    expect(look(comb, 0.02).length).toBe(12);
  });

  it("are found from bin 3 up, and not in the bins of the mean", () => {
    expect(look([[4, 1]], 0.1).map((t) => Math.round(t.frequency_Hz))).toEqual([4]);
    expect(look([[1, 1]], 0.1)).toEqual([]);
  });
});

describe("tone search", () => {
  const search: ToneSearch = { resolution_Hz: 1, enbw_Hz: 1.5, degreesOfFreedom: 10, falseAlarm: 0.01 };
  it("finds nothing in nothing, in too few bins, or on a slope", () => {
    expect(findTones(new Float64Array(129), search)).toEqual([]);
    expect(findTones(new Float64Array(9).fill(1), search)).toEqual([]);
    expect(findTones(new Float64Array(0), search)).toEqual([]);
    const slope = Float64Array.from({ length: 129 }, (_, k) => 1 / (1 + k) ** 4);
    expect(findTones(slope, search)).toEqual([]);
  });
  it("refuses a rate of false alarms that is none", () => {
    for (const falseAlarm of [0, 0.5, -1, Number.NaN])
      expect(() => findTones(new Float64Array(129), { ...search, falseAlarm })).toThrow(RangeError);
  });
});
