import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { designEquiripple } from "../../src/signal/equiripple.ts";
import { filterFigures, meanGain } from "../../src/signal/filter-figures.ts";
import {
  edgeFrequencies,
  gainAt,
  groupDelayAt,
  groupDelayOf,
  lowestGain,
  noiseBandwidth,
  peakGain,
  responseAt,
  stepResponse,
  symmetryOf,
} from "../../src/signal/response.ts";
import { designWindowedSinc } from "../../src/signal/windowed-sinc.ts";
import fir from "../reference/09-fir-response.json" with { type: "json" };
import averages from "../reference/10-moving-average-response.json" with { type: "json" };

const equal = (n: number) => new Float64Array(n).fill(1 / n);

describe("responses against reference 09", () => {
  it.each(fir.cases)("$id", (example) => {
    const taps = Float64Array.from(example.inputs.taps);
    for (const point of example.expected) {
      const { re, im } = responseAt(taps, point.f);
      expect(Math.abs(re - point.re)).toBeLessThan(1e-12);
      expect(Math.abs(im - point.im)).toBeLessThan(1e-12);
      expect(Math.abs(gainAt(taps, point.f) - point.mag)).toBeLessThan(1e-12);
      const delay = groupDelayAt(taps, point.f);
      if (point.groupDelaySamples === null) {
        // Where nothing passes there is no delay; the delay by symmetry is as good.
        expect([null, (taps.length - 1) / 2]).toContain(delay);
      } else if (point.mag > 1e-6) {
        expect(Math.abs(delay! - point.groupDelaySamples)).toBeLessThan(1e-9);
        const phase = Math.atan2(im, re) - point.phaseRad!;
        expect(Math.abs(phase - 2 * Math.PI * Math.round(phase / (2 * Math.PI)))).toBeLessThan(1e-9);
      }
    }
    expect(symmetryOf(taps) === "even").toBe(example.symmetric);
    const constant = example.constantGroupDelay;
    if (constant !== null) {
      expect(groupDelayOf(taps)).toEqual({
        samples: constant,
        constant: true,
        lowest: constant,
        highest: constant,
      });
    }
  });

  it("states the range of delay of taps without symmetry, and that of a pure delay", () => {
    const skew = groupDelayOf(Float64Array.of(0.4, 0.3, 0.2, 0.1));
    expect(skew.constant).toBe(false);
    expect(skew.samples).toBeCloseTo(1, 12);
    expect(skew.lowest).toBeLessThan(0.97);
    expect(skew.highest).toBeCloseTo(1, 12);
    const pure = groupDelayOf(Float64Array.of(0, 0, 0, 1));
    expect(pure.constant).toBe(true);
    expect(pure.samples).toBeCloseTo(3, 12);
    expect(symmetryOf(Float64Array.of(0.5, 0, -0.5))).toBe("odd");
  });
});

describe("moving averages against reference 10", () => {
  const points = averages.cases.filter((c) => c.inputs.cyclesPerSample !== undefined);
  it.each(points)("$id", ({ inputs, expected }) => {
    const f = inputs.cyclesPerSample!;
    expect(Math.abs(gainAt(equal(inputs.N), f) - expected.magnitude!)).toBeLessThan(1e-12);
    expect(Math.abs(meanGain(inputs.N, f) - expected.amplitude!)).toBeLessThan(1e-12);
  });

  const whole = averages.cases.filter((c) => c.inputs.cyclesPerSample === undefined);
  it.each(whole)("$id", ({ inputs, expected }) => {
    const taps = equal(inputs.N);
    const f3 = edgeFrequencies(taps).f3;
    expect(f3).toHaveLength(1);
    expect(Math.abs(f3[0]! / expected.minus3dBCyclesPerSample! - 1)).toBeLessThan(1e-9);
    expect(gainAt(taps, expected.halfPowerCyclesPerSample!)).toBeCloseTo(Math.SQRT1_2, 10);
    for (const f of expected.nulls!) expect(gainAt(taps, f)).toBeLessThan(1e-12);
    expect(noiseBandwidth(taps)).toBeCloseTo(expected.whiteNoiseVarianceRatio! / 2, 12);
    expect(groupDelayOf(taps).samples).toBe(expected.delaySamples);
    if (expected.worstSidelobe !== undefined) {
      const lobe = peakGain(taps, expected.nulls![0]!, 0.5);
      expect(Math.abs(lobe.gain - expected.worstSidelobe)).toBeLessThan(1e-12);
      expect(lobe.frequency).toBeCloseTo(expected.worstSidelobeAt!, 6);
    }
  });

  it("closed forms of equal weights agree with what is found on the taps", () => {
    for (const n of [3, 4, 5, 16, 61]) {
      const closed = filterFigures(equal(n));
      const edges = edgeFrequencies(equal(n));
      for (const key of ["f1", "f3", "f6"] as const) expect(closed[key][0]).toBeCloseTo(edges[key][0]!, 11);
      expect(closed.rise).toBeCloseTo(stepResponse(equal(n)).rise_10_90!, 11);
      expect(closed.noiseBandwidth).toBeCloseTo(noiseBandwidth(equal(n)), 12);
    }
  });
});

describe("largest and smallest gain", () => {
  const plain = (taps: Float64Array, from: number, to: number, points: number) => {
    let high = 0;
    let low = Number.POSITIVE_INFINITY;
    for (let i = 0; i <= points; i++) {
      const g = gainAt(taps, from + ((to - from) * i) / points);
      high = Math.max(high, g);
      low = Math.min(low, g);
    }
    return { high, low };
  };

  it("are not passed by any of many points looked at one by one, nor far above them", () => {
    const weight = fc.integer({ min: -1000, max: 1000 }).map((w) => w / 1000);
    fc.assert(
      fc.property(
        fc.array(weight, { minLength: 1, maxLength: 24 }),
        fc.double({ min: 0, max: 0.5, noNaN: true }),
        fc.double({ min: 0, max: 0.5, noNaN: true }),
        (list, a, b) => {
          const taps = Float64Array.from(list);
          const [from, to] = [Math.min(a, b), Math.max(a, b)];
          const size = list.reduce((sum, w) => sum + Math.abs(w), 1e-300);
          const twin = plain(taps, from, to, 4000);
          const peak = peakGain(taps, from, to);
          const lowest = lowestGain(taps, from, to);
          expect(peak.gain).toBeGreaterThanOrEqual(twin.high - 1e-12 * size);
          expect(lowest.gain).toBeLessThanOrEqual(twin.low + 1e-12 * size);
          // Between neighbours of the twin's grid, |H| changes by less than 2 pi n |h| times half a step.
          const slack = (2 * Math.PI * list.length * size * (to - from)) / 8000 + 1e-12 * size;
          expect(peak.gain).toBeLessThanOrEqual(twin.high + slack);
          expect(lowest.gain).toBeGreaterThanOrEqual(twin.low - slack);
          for (const found of [peak, lowest]) {
            expect(found.frequency).toBeGreaterThanOrEqual(from);
            expect(found.frequency).toBeLessThanOrEqual(to);
            expect(Math.abs(gainAt(taps, found.frequency) - found.gain)).toBeLessThan(1e-12 * size);
          }
        },
      ),
      { numRuns: 150, seed: 90210 },
    );
  });

  it("find the highest of many peaks that differ by a millionth", () => {
    // An equiripple stopband has equal peaks, to which the grid is off by up to a thousandth, each by another share;
    // a slow tilt of (1 + 2e-6 cos 2 pi f), or its inverse, makes the first or the last of them the highest.
    const bands = [
      { from: 0, to: 0.1, gain: 1, weight: 1 },
      { from: 0.12, to: 0.5, gain: 0, weight: 1 },
    ];
    for (const n of [61, 101, 150])
      for (const tilt of [1e-6, -1e-6]) {
        const level = designEquiripple(n, bands).taps;
        const taps = new Float64Array(n + 2);
        for (const [i, w] of level.entries()) {
          taps[i]! += tilt * w;
          taps[i + 1]! += w;
          taps[i + 2]! += tilt * w;
        }
        for (const [from, to] of [
          [0.125, 0.48],
          [0.2, 0.4],
          [0.1503, 0.1907],
        ] as const) {
          const twin = plain(taps, from, to, 40_000);
          const { gain } = peakGain(taps, from, to);
          expect(gain / twin.high - 1).toBeGreaterThan(-1e-12);
          expect(gain / twin.high - 1).toBeLessThan(1e-6);
        }
      }
  });

  it("sees zeros, constants and single points", () => {
    expect(lowestGain(equal(7), 0.1, 0.2).gain).toBeLessThan(1e-14);
    expect(peakGain(Float64Array.of(0, 0, 1, 0), 0.1, 0.4).gain).toBeCloseTo(1, 14);
    expect(peakGain(equal(4), 0.05, 0.05).gain).toBeCloseTo(0.9393474323917528, 13);
    expect(() => peakGain(equal(4), 0.3, 0.2)).toThrow(RangeError);
    expect(() => peakGain(equal(4), 0.3, 0.6)).toThrow(RangeError);
  });

  it("does a long pure delay and a long filter in reasonable time", () => {
    const delay = new Float64Array(20_001);
    delay[10_000] = 1;
    const start = performance.now();
    expect(peakGain(delay, 0, 0.5).gain).toBeCloseTo(1, 12);
    const long = designWindowedSinc({
      taps: 20_001,
      shape: "low-pass",
      edges: [0.1],
      window: "kaiser",
      beta: 8,
    });
    expect(peakGain(long, 0.101, 0.5).gain).toBeLessThan(1e-4);
    expect(performance.now() - start).toBeLessThan(5000);
  });
});

describe("edges, rise and overshoot", () => {
  it("give one frequency for low- and high-pass, two for bands, and none where nothing crosses", () => {
    const design = (shape: "low-pass" | "high-pass" | "band-pass" | "band-stop", edges: number[]) =>
      edgeFrequencies(designWindowedSinc({ taps: 101, shape, edges, window: "hamming" }));
    for (const [shape, edges] of [
      ["low-pass", [0.1]],
      ["high-pass", [0.1]],
      ["band-pass", [0.1, 0.3]],
      ["band-stop", [0.1, 0.3]],
    ] as const) {
      const found = design(shape, [...edges]);
      for (const f of [found.f1, found.f3, found.f6]) expect(f).toHaveLength(edges.length);
      const inner = shape === "low-pass" || shape === "band-stop" ? 1 : -1;
      expect(inner * (found.f6[0]! - found.f3[0]!)).toBeGreaterThan(0);
      expect(inner * (found.f3[0]! - found.f1[0]!)).toBeGreaterThan(0);
    }
    expect(edgeFrequencies(Float64Array.of(1))).toEqual({ f1: [], f3: [], f6: [] });
    expect(edgeFrequencies(Float64Array.of(0, 0))).toEqual({ f1: [], f3: [], f6: [] });
    // Falls by 1.94 dB at the Nyquist frequency and no further.
    const mild = edgeFrequencies(Float64Array.of(0.1, 0.9));
    expect(mild.f1).toHaveLength(1);
    expect(mild.f3).toEqual([]);
  });

  it("takes no ripple inside the passband for an edge, and crosses exactly", () => {
    // Two equal echoes make a ripple of 2 dB before the edge of a steep low-pass.
    const low = designWindowedSinc({ taps: 201, shape: "low-pass", edges: [0.2], window: "hamming" });
    const taps = new Float64Array(221);
    for (let n = 0; n < 201; n++) {
      taps[n]! += 0.06 * low[n]!;
      taps[n + 10]! += low[n]!;
      taps[n + 20]! += 0.06 * low[n]!;
    }
    const { f1, f3, f6 } = edgeFrequencies(taps);
    const peak = peakGain(taps, 0, 0.5).gain;
    for (const [f, dB] of [
      [f1, 1],
      [f3, 3],
      [f6, 6],
    ] as const) {
      expect(f).toHaveLength(1);
      expect(f[0]!).toBeGreaterThan(0.19);
      expect(Math.abs(gainAt(taps, f[0]!) / peak - 10 ** (-dB / 20))).toBeLessThan(1e-9);
    }
  });

  it("states no rise and no overshoot of a high-pass, whatever it leaves of a constant", () => {
    const low = Float64Array.from(
      { length: 57 },
      (_, n) => (0.5 * (1 - Math.cos((2 * Math.PI * (n + 1)) / 58))) / 29,
    );
    const high = low.map((w, n) => (n === 28 ? 1.0007 : 0) - w);
    expect(stepResponse(high)).toEqual({ rise_10_90: null, overshoot: 0 });
  });

  it("measures rise and overshoot of the running sum", () => {
    expect(stepResponse(equal(10)).rise_10_90).toBeCloseTo(8, 12);
    expect(stepResponse(equal(10)).overshoot).toBe(0);
    const over = stepResponse(Float64Array.of(-0.1, 0.6, 0.6, -0.1));
    expect(over.overshoot).toBeCloseTo(0.1, 12);
    expect(over.rise_10_90).toBeCloseTo(1 + 0.4 / 0.6 - 0.2 / 0.6, 12);
    expect(stepResponse(Float64Array.of(0.5, -0.5)).rise_10_90).toBeNull();
  });
});
