import { describe, expect, it } from "vitest";
import { bandPower, equivalentDegreesOfFreedom, SpectrumPlan, welch } from "../../src/signal/welch.ts";
import type { WindowKind } from "../../src/signal/windows.ts";
import reference from "../reference/13-welch-psd.json" with { type: "json" };
import parseval from "../reference/14-parseval.json" with { type: "json" };
import { nearGaussian } from "./noise.ts";

const sum = (x: ArrayLike<number>) => Array.from(x).reduce((a, b) => a + b, 0);
const meanSquare = (x: Float64Array) => x.reduce((s, v) => s + v * v, 0) / x.length;

describe("Welch's method against reference 13", () => {
  it.each(reference.cases)("$id", ({ inputs, expected }) => {
    const { n, fs, segment, overlap, signal } = inputs;
    const noise = nearGaussian(signal.seed, n);
    const x = Float64Array.from({ length: n }, (_, i) => {
      let v = signal.dc + signal.slope * i;
      for (const tone of signal.tones) v += tone.a * Math.sin((2 * Math.PI * tone.f * i) / fs + tone.phase);
      return v + 0.5 * noise[i]!;
    });
    expect(Math.abs(sum(x) - expected.xSum)).toBeLessThan(1e-9 * Math.abs(expected.xSum));
    const { psd, segments, plan } = welch(x, {
      segment,
      hop: segment - overlap,
      window: inputs.window as WindowKind,
      samplingRate_Hz: fs,
      takenOut: inputs.detrendEachSegment === "linear" ? "line" : "mean",
    });
    expect(segments).toBe(expected.segments);
    expect(psd.length).toBe(expected.density.length);
    const floor = 1e-12 * Math.max(...expected.density);
    const toSpectrum = plan.enbw_Hz;
    for (const [k, wanted] of expected.density.entries()) {
      expect(Math.abs(psd[k]! - wanted)).toBeLessThanOrEqual(1e-9 * wanted + floor);
      const power = expected.spectrum[k]!;
      expect(Math.abs(psd[k]! * toSpectrum - power)).toBeLessThanOrEqual(1e-9 * power + floor * toSpectrum);
      expect(plan.frequency(k)).toBeCloseTo(expected.frequencies.step * k, 9);
    }
    const whole = bandPower(psd, plan.resolution_Hz, 0, fs / 2, fs / 2);
    expect(Math.abs(whole / expected.integralOfDensity - 1)).toBeLessThan(1e-9);
  });

  it("takes half-overlapping segments when nothing is said", () => {
    const plan = new SpectrumPlan({ segment: 101, window: "hann", samplingRate_Hz: 1 });
    expect(plan.hop).toBe(51);
    expect(new SpectrumPlan({ segment: 256, window: "hann", samplingRate_Hz: 1 }).hop).toBe(128);
  });
});

describe("Parseval's theorem, reference 14", () => {
  const noise = parseval.cases.filter((c) => c.inputs.seed !== undefined);
  it.each(noise)("$id", ({ inputs, expected }) => {
    const x = nearGaussian(inputs.seed!, inputs.n!);
    expect(meanSquare(x)).toBeCloseTo(expected.meanSquare, 14);
    const { psd, plan } = welch(x, {
      segment: x.length,
      window: "rectangular",
      samplingRate_Hz: 2,
      takenOut: "nothing",
    });
    const integral = bandPower(psd, plan.resolution_Hz, 0, 1, 1);
    expect(Math.abs(integral / expected.periodogramIntegralFs2! - 1)).toBeLessThan(1e-12);
    expect(Math.abs(integral / expected.meanSquare - 1)).toBeLessThan(1e-12);
  });

  it("sine-on-bin", () => {
    const { inputs, expected } = parseval.cases.find((c) => c.id === "sine-on-bin")!;
    const x = Float64Array.from(
      { length: inputs.N! },
      (_, i) => inputs.A! * Math.sin((2 * Math.PI * inputs.k! * i) / inputs.N!),
    );
    for (const [window, peak] of [
      ["rectangular", expected.densityPeakBoxcar!],
      ["hann", expected.densityPeakHannPeriodic!],
    ] as const) {
      const { psd, plan } = welch(x, {
        segment: x.length,
        window,
        samplingRate_Hz: inputs.fs!,
        takenOut: "nothing",
      });
      expect(Math.abs(psd[inputs.k!]! / peak - 1)).toBeLessThan(1e-12);
      expect(Math.abs((psd[inputs.k!]! * plan.enbw_Hz) / expected.spectrumPeakBoxcar! - 1)).toBeLessThan(
        1e-12,
      );
      expect(Math.abs(bandPower(psd, plan.resolution_Hz, 0, 25) / expected.meanSquare - 1)).toBeLessThan(
        1e-12,
      );
    }
  });
});

describe("one segment", () => {
  const windows: WindowKind[] = ["rectangular", "triangular", "hann", "hamming", "blackman", "kaiser"];
  it.each(windows)("%s: the integral of its density is the mean square that it returns", (window) => {
    for (const segment of [2, 64, 101, 1000]) {
      const x = nearGaussian(42, segment).map((v) => v + 1000);
      const plan = new SpectrumPlan({ segment, window, beta: 8, samplingRate_Hz: 12.5 });
      const re = new Float64Array(plan.bins);
      const im = new Float64Array(plan.bins);
      const square = plan.spectrum(x, re, im);
      const psd = re.map((r, k) => (r * r + im[k]! * im[k]!) * plan.densityAt(k));
      const whole = bandPower(psd, plan.resolution_Hz, 0, 6.25, 6.25);
      expect(Math.abs(whole - square)).toBeLessThan(1e-12 * square);
      expect(Math.abs(sum(psd) * plan.resolution_Hz - square)).toBeLessThan(1e-12 * square);
    }
  });

  it("of a constant is exactly nothing, of a line nothing but rounding", () => {
    const plan = new SpectrumPlan({ segment: 256, window: "hann", samplingRate_Hz: 1 });
    const re = new Float64Array(plan.bins).fill(1);
    const im = new Float64Array(plan.bins).fill(1);
    expect(plan.spectrum(new Float64Array(256).fill(1e9 + 0.1), re, im)).toBe(0);
    expect(re.every((v) => v === 0)).toBe(true);
    expect(im.every((v) => v === 0)).toBe(true);
    const levelled = new SpectrumPlan({ segment: 256, window: "hann", samplingRate_Hz: 1, takenOut: "line" });
    const line = Float64Array.from({ length: 256 }, (_, i) => 1e5 + 3 * i);
    expect(levelled.spectrum(line, re, im)).toBeLessThan(1e-20 * 1e10);
  });

  it("refuses lengths and rates that make no sense", () => {
    const good = { segment: 8, window: "hann", samplingRate_Hz: 1 } as const;
    expect(() => new SpectrumPlan({ ...good, segment: 1 })).toThrow(RangeError);
    expect(() => new SpectrumPlan({ ...good, segment: 8.5 })).toThrow(RangeError);
    expect(() => new SpectrumPlan({ ...good, samplingRate_Hz: 0 })).toThrow(RangeError);
    expect(() => new SpectrumPlan({ ...good, hop: 0 })).toThrow(RangeError);
  });
});

describe("band power", () => {
  const psd = Float64Array.of(3, 1, 4, 1, 5, 9, 2, 6, 5);
  const whole = sum(psd) * 0.5;

  it("of adjacent bands adds up to the whole, wherever the cuts lie", () => {
    const cuts = [0, 0.01, 0.13, 0.25, 0.4, 0.5, 0.75, 1.1, 1.62, 2.25, 3, 3.3, 3.74, 3.76, 3.99, 4];
    let total = 0;
    for (let i = 1; i < cuts.length; i++) total += bandPower(psd, 0.5, cuts[i - 1]!, cuts[i]!);
    expect(Math.abs(total / whole - 1)).toBeLessThan(1e-15 * cuts.length);
    expect(bandPower(psd, 0.5, 0, 4)).toBeCloseTo(whole, 13);
    expect(bandPower(psd, 0.5, -3, 99)).toBeCloseTo(whole, 13);
  });
  it("splits a bin pro rata, the end bins over half a width", () => {
    expect(bandPower(psd, 0.5, 0.25, 0.75)).toBeCloseTo(0.5 * 1, 14);
    expect(bandPower(psd, 0.5, 0.25, 0.5)).toBeCloseTo(0.25 * 1, 14);
    expect(bandPower(psd, 0.5, 0, 0.25)).toBeCloseTo(0.5 * 3, 14);
    expect(bandPower(psd, 0.5, 0, 0.125)).toBeCloseTo(0.25 * 3, 14);
    expect(bandPower(psd, 0.5, 3.75, 4)).toBeCloseTo(0.5 * 5, 14);
    expect(bandPower(psd, 0.5, 2, 2)).toBe(0);
  });
  it("gives the last bin of an odd segment its whole width", () => {
    // Nine bins of width 0.5 from 17 samples: half the rate is 4.25.
    expect(bandPower(psd, 0.5, 3.75, 4.25, 4.25)).toBeCloseTo(0.5 * 5, 14);
    expect(bandPower(psd, 0.5, 3.75, 4, 4.25)).toBeCloseTo(0.25 * 5, 14);
    expect(bandPower(psd, 0.5, 0, 4.25, 4.25)).toBeCloseTo(whole, 13);
  });
  it("refuses a band turned round", () => {
    expect(() => bandPower(psd, 0.5, 2, 1)).toThrow(RangeError);
    expect(() => bandPower(psd, 0.5, Number.NaN, 1)).toThrow(RangeError);
  });
});

describe("spread of the estimate", () => {
  it.each(["hann", "rectangular", "blackman"] as const)("%s: has the degrees of freedom stated", (window) => {
    const records = 400;
    const plan = new SpectrumPlan({ segment: 64, window, samplingRate_Hz: 1 });
    const samples = 64 + 6 * 32;
    const noise = nearGaussian(20310304, records * samples);
    let mean = 0;
    let square = 0;
    let count = 0;
    for (let r = 0; r < records; r++) {
      const x = noise.subarray(r * samples, (r + 1) * samples);
      const { psd } = welch(x, { segment: 64, window, samplingRate_Hz: 1 });
      for (let k = 4; k <= 28; k++) {
        mean += psd[k]!;
        square += psd[k]! ** 2;
        count++;
      }
    }
    mean /= count;
    // White noise of variance 1 has the one-sided density 2 at a rate of 1.
    expect(Math.abs(mean / 2 - 1)).toBeLessThan(0.02);
    const measured = (2 * mean * mean) / (square / count - mean * mean);
    const stated = equivalentDegreesOfFreedom(plan.windowCoefficients, plan.hop, 7);
    // 10,000 values, neighbours correlated: one standard error of the variance is about 2.5 %.
    expect(Math.abs(measured / stated - 1)).toBeLessThan(0.08);
  });
});
