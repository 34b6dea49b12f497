import { describe, expect, it } from "vitest";
import { foldedFrequency, foldSources } from "../../src/signal/fold.ts";
import reference from "../reference/16-alias-frequency.json" with { type: "json" };

describe("folded frequency", () => {
  it.each(reference.cases)("$id", ({ inputs, expected }) => {
    const { frequency, inverted } = foldedFrequency(inputs.toneHz, inputs.sampleHz);
    expect(Math.abs(frequency - expected.apparentHz)).toBeLessThanOrEqual(1e-12 * expected.apparentHz);
    expect(inverted).toBe(expected.spectrumInverted);
  });

  it("is exact at multiples of the rate and half-way between", () => {
    for (const rate of [50, 0.1, 1 / 3600, 16.4, 1e6 / 7])
      for (let j = 0; j < 40; j++) {
        // j * rate / 2 rounds; the exact multiples are made by doubling.
        const k = 2 ** (j % 20);
        expect(foldedFrequency(k * rate, rate).frequency).toBe(0);
        expect(foldedFrequency(rate / 2, rate)).toEqual({ frequency: rate / 2, inverted: false });
      }
    expect(foldedFrequency(150, 100)).toEqual({ frequency: 50, inverted: false });
  });

  it("has the samples of the tone that it names", () => {
    for (const f of [0, 3, 17.3, 49, 51, 99.5, 130, 250.25, 1234]) {
      const { frequency } = foldedFrequency(f, 100);
      for (let i = 0; i < 50; i++)
        expect(Math.cos((2 * Math.PI * f * i) / 100)).toBeCloseTo(
          Math.cos((2 * Math.PI * frequency * i) / 100),
          9,
        );
    }
  });

  it("refuses what is no frequency and no rate", () => {
    expect(() => foldedFrequency(-1, 10)).toThrow(RangeError);
    expect(() => foldedFrequency(Number.NaN, 10)).toThrow(RangeError);
    expect(() => foldedFrequency(1, 0)).toThrow(RangeError);
  });
});

describe("fold sources", () => {
  it("names both sides of each multiple of the new rate", () => {
    expect(foldSources({ from: 1, to: 2 }, 10, 40)).toEqual([
      { from: 8, to: 9 },
      { from: 11, to: 12 },
      { from: 18, to: 19 },
    ]);
  });
  it("joins the sides of a band from zero, and everything when the band is all there is", () => {
    expect(foldSources({ from: 0, to: 2 }, 10, 50)).toEqual([
      { from: 8, to: 12 },
      { from: 18, to: 22 },
    ]);
    expect(foldSources({ from: 0, to: 5 }, 10, 40)).toEqual([{ from: 5, to: 20 }]);
    expect(foldSources({ from: 0, to: 5 }, 10, 50)).toEqual([{ from: 5, to: 25 }]);
    expect(foldSources({ from: 3, to: 5 }, 10, 50)).toEqual([
      { from: 5, to: 7 },
      { from: 13, to: 17 },
      { from: 23, to: 25 },
    ]);
  });
  it("takes single frequencies, the ends of the range included", () => {
    const at = (f: number, n: number, o: number) => foldSources({ from: f, to: f }, n, o).map((s) => s.from);
    expect(at(0, 10, 40)).toEqual([10, 20]);
    expect(at(0, 10, 30)).toEqual([10]);
    expect(at(5, 10, 30)).toEqual([15]);
    expect(at(5, 10, 40)).toEqual([15]);
    expect(at(2, 10, 10)).toEqual([]);
  });
  it("agrees with folding frequency by frequency, at rates that are not exact", () => {
    for (const [newRate, factor] of [
      [1 / 0.07, 3],
      [1 / 60, 10],
      [0.1, 7],
      [16.4, 2],
    ] as const) {
      const oldRate = newRate * factor;
      for (const [a, b] of [
        [0, 0.2],
        [0.1, 0.35],
        [0.3, 0.5],
        [0, 0.5],
      ] as const) {
        const sources = foldSources({ from: a * newRate, to: b * newRate }, newRate, oldRate);
        for (let i = 1; i < 4000; i++) {
          // Points between the edges, so that rounding at an edge decides nothing.
          const f = ((i + 0.123) / 8000) * oldRate;
          if (f <= newRate / 2) continue;
          const home = foldedFrequency(f, newRate).frequency;
          const lands = home >= a * newRate && home <= b * newRate;
          expect(sources.some((s) => f >= s.from && f <= s.to)).toBe(lands);
        }
      }
    }
  });
  it("refuses a factor that is not whole and a band that is not inside", () => {
    expect(() => foldSources({ from: 0, to: 1 }, 10, 25)).toThrow(RangeError);
    expect(() => foldSources({ from: 0, to: 6 }, 10, 40)).toThrow(RangeError);
    expect(() => foldSources({ from: 2, to: 1 }, 10, 40)).toThrow(RangeError);
  });
});
