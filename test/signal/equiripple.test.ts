import { describe, expect, it } from "vitest";
import type { DesignBand } from "../../src/signal/design-bands.ts";
import { DesignError } from "../../src/signal/design-error.ts";
import { designEquiripple } from "../../src/signal/equiripple.ts";
import { amplitudeAt } from "../../src/signal/linear-phase.ts";
import reference from "../reference/05-equiripple-taps.json" with { type: "json" };
import { uniform } from "./masks.ts";

function bandsOf(
  edges: readonly number[],
  gains: readonly number[],
  weights: readonly number[],
): DesignBand[] {
  return gains.map((gain, i) => ({ from: edges[2 * i]!, to: edges[2 * i + 1]!, gain, weight: weights[i]! }));
}

/** Largest weighted error at many points, by the plain sum of cosines. */
function plainDeviation(taps: Float64Array, bands: readonly DesignBand[], points: number): number {
  let worst = 0;
  for (const band of bands)
    for (let i = 0; i <= points; i++) {
      const f = band.from + ((band.to - band.from) * i) / points;
      let sum = 0;
      for (let n = 0; n < taps.length; n++)
        sum += taps[n]! * Math.cos(2 * Math.PI * f * (n - (taps.length - 1) / 2));
      worst = Math.max(worst, band.weight * Math.abs(sum - (band.gain as number)));
    }
  return worst;
}

describe("equiripple against reference 05", () => {
  it.each(reference.cases)("$id", ({ inputs, expected }) => {
    const bands = bandsOf(inputs.bandsCyclesPerSample, inputs.desired, inputs.weights);
    const made = designEquiripple(inputs.taps, bands);
    const { measured, taps } = expected.bestFineGrid;
    // The true optimum lies between the bound and the deviation of the best design on a grid.
    expect(made.deviation).toBeGreaterThanOrEqual(measured.minimaxLowerBound);
    expect(made.deviation).toBeLessThanOrEqual(measured.weightedDeviation);
    expect(made.deviation / made.lowerBound - 1).toBeLessThan(1e-6);
    expect(made.alternations).toBeGreaterThanOrEqual(measured.alternationsNeeded);
    expect(Math.abs(made.largestDontCareGain - measured.maxGainInTransitionBands)).toBeLessThan(1e-5);
    expect(Array.from(made.taps)).toEqual(Array.from(made.taps).reverse());
    // Taps of a grid of 1000 points a tap: nearer than the tolerance given there.
    for (const [n, wanted] of taps.entries()) expect(Math.abs(made.taps[n]! - wanted)).toBeLessThan(1e-6);
    expect(plainDeviation(made.taps, bands, 3000) / made.deviation - 1).toBeLessThan(1e-9);
    expect(plainDeviation(made.taps, bands, 3000) / made.deviation - 1).toBeGreaterThan(-1e-3);
  });
});

/** Two to five bands with gaps of a few times 1 / taps, equal or not. */
function randomBands(seed: number): { taps: number; bands: DesignBand[] } {
  const next = uniform(seed);
  for (let i = 0; i < 5; i++) next();
  const count = 2 + Math.floor(4 * next());
  let taps = [33, 64, 101, 150, 257, 400, 513][Math.floor(7 * next())]!;
  const narrowest = Math.min((1.2 + 1.8 * next()) / taps, 0.3 / (count - 1) / 3);
  const equal = next() < 0.5;
  const gaps = Array.from({ length: count - 1 }, () => narrowest * (equal ? 1 : 1 + 2 * next()));
  const shares = Array.from({ length: count }, () => 0.2 + next());
  const room = 0.5 - gaps.reduce((a, b) => a + b, 0);
  const whole = shares.reduce((a, b) => a + b, 0);
  const first = Math.floor(2 * next());
  let from = 0;
  const bands = shares.map((share, i) => {
    const to = i === count - 1 ? 0.5 : from + (share / whole) * room;
    const band = { from, to, gain: (i + first) % 2, weight: 10 ** (2 * next() - 1) };
    from = to + (gaps[i] ?? 0);
    return band;
  });
  if (taps % 2 === 0 && bands.at(-1)!.gain !== 0) taps++;
  return { taps, bands };
}

describe("equiripple", () => {
  it("is proved the best within 1e-6, for two to five bands, lengths to 513, any weights", () => {
    let proved = 0;
    for (let seed = 1; seed <= 60; seed++) {
      const { taps, bands } = randomBands(seed);
      const made = designEquiripple(taps, bands);
      expect(made.deviation / made.lowerBound - 1, `seed ${seed}`).toBeLessThan(1e-6);
      expect(made.alternations, `seed ${seed}`).toBeGreaterThanOrEqual(Math.ceil(taps / 2) + 1);
      // The claim is checked on points that the design knows nothing of.
      if (taps < 160)
        expect(plainDeviation(made.taps, bands, 997) / made.deviation - 1, `seed ${seed}`).toBeLessThan(1e-8);
      proved++;
    }
    expect(proved).toBe(60);
  });

  it("gets no worse with two taps more", () => {
    const bands = bandsOf([0, 0.1, 0.15, 0.5], [1, 0], [1, 10]);
    for (let n = 5; n < 60; n++)
      expect(designEquiripple(n + 2, bands).deviation).toBeLessThanOrEqual(
        designEquiripple(n, bands).deviation * (1 + 1e-9),
      );
  });

  it("alternates, also on a sloping wish", () => {
    const bands: DesignBand[] = [
      { from: 0, to: 0.2, gain: [1, 0.5], weight: 1 },
      { from: 0.25, to: 0.5, gain: 0, weight: 2 },
    ];
    const made = designEquiripple(31, bands);
    expect(made.deviation / made.lowerBound - 1).toBeLessThan(1e-6);
    expect(Math.abs(amplitudeAt(made.taps, 0.1) - 0.75)).toBeLessThanOrEqual(made.deviation);
  });

  it("makes the shortest filters too", () => {
    const bands = bandsOf([0, 0.1, 0.3, 0.5], [1, 0], [1, 1]);
    expect(designEquiripple(1, bands).taps).toEqual(Float64Array.of(0.5));
    for (const n of [2, 3, 4, 5]) expect(designEquiripple(n, bands).alternations).toBe(Math.ceil(n / 2) + 1);
  });

  it("warns of a large gain where nothing was asked", () => {
    // Transitions of very different widths: the polynomial runs free in the wide one.
    const made = designEquiripple(61, bandsOf([0, 0.1, 0.12, 0.2, 0.35, 0.5], [0, 1, 0], [1, 1, 1]));
    expect(made.deviation / made.lowerBound - 1).toBeLessThan(1e-6);
    expect(made.largestDontCareGain).toBeGreaterThan(2);
  });

  it("says so when it cannot prove the optimum, and never answers with garbage", () => {
    const hopeless: [number, DesignBand[]][] = [
      [11, bandsOf([0, 0.4], [1], [1])],
      [201, bandsOf([0, 0.1, 0.4, 0.5], [1, 0], [1, 1])],
      [513, bandsOf([0, 0.002, 0.4, 0.402], [1, 0], [1, 1])],
    ];
    for (const [n, bands] of hopeless) {
      try {
        designEquiripple(n, bands);
        expect.unreachable();
      } catch (error) {
        expect(error).toBeInstanceOf(DesignError);
        expect((error as DesignError).problem).toMatch(/cannot be proved/);
      }
    }
  });

  it("refuses impossible bands with the reason", () => {
    const good = { from: 0, to: 0.1, gain: 1, weight: 1 };
    const stop = { from: 0.2, to: 0.5, gain: 0, weight: 1 };
    const cases: [number, DesignBand[], RegExp][] = [
      [0, [good, stop], /length/],
      [2003, [good, stop], /length/],
      [21.5, [good, stop], /length/],
      [21, [], /no band/],
      [21, [good, { ...stop, from: 0.1 }], /gap/],
      [21, [good, { ...stop, from: 0.05 }], /gap/],
      [21, [good, { ...stop, to: 0.6 }], /rising pair/],
      [21, [good, { ...stop, to: 0.2 }], /rising pair/],
      [21, [good, { ...stop, weight: 0 }], /weight/],
      [21, [good, { ...stop, gain: Number.NaN }], /finite gain/],
      [21, [{ ...good, gain: 0 }, stop], /nothing is to pass/],
      [
        20,
        [
          { ...good, gain: 0 },
          { ...stop, gain: 1 },
        ],
        /even length is zero at the Nyquist/,
      ],
    ];
    for (const [n, bands, words] of cases) {
      try {
        designEquiripple(n, bands);
        expect.unreachable();
      } catch (error) {
        expect(error).toBeInstanceOf(DesignError);
        expect((error as DesignError).problem).toMatch(words);
      }
    }
  });
});
