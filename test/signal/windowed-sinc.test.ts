import { describe, expect, it } from "vitest";
import { DesignError } from "../../src/signal/design-error.ts";
import { edgeFrequencies, gainAt, lowestGain, peakGain, symmetryOf } from "../../src/signal/response.ts";
import { designWindowedSinc, type FilterShape } from "../../src/signal/windowed-sinc.ts";
import type { WindowKind } from "../../src/signal/windows.ts";
import reference from "../reference/03-windowed-sinc-taps.json" with { type: "json" };

const SHAPES: Record<string, FilterShape> = {
  lowpass: "low-pass",
  highpass: "high-pass",
  bandpass: "band-pass",
  bandstop: "band-stop",
};

const exact = reference.cases.filter((c) => c.inputs.window !== undefined);

describe("windowed-sinc taps against reference 03", () => {
  it.each(exact)("$id", ({ inputs, expected }) => {
    const taps = designWindowedSinc({
      taps: inputs.taps,
      shape: SHAPES[inputs.passType]!,
      edges: inputs.cutoffCyclesPerSample,
      window: (inputs.window === "bartlett" ? "triangular" : inputs.window) as WindowKind,
      ...(inputs.beta == null ? {} : { beta: inputs.beta }),
    });
    // What is not scaled there differs by one factor, the gain at its reference frequency.
    const middle = Math.floor(inputs.taps / 2);
    const scale = inputs.scale ? 1 : expected.taps[middle]! / taps[middle]!;
    for (const [n, wanted] of expected.taps.entries())
      expect(Math.abs(taps[n]! * scale - wanted)).toBeLessThanOrEqual(1e-14 + 1e-12 * Math.abs(wanted));
    for (const [i, f] of expected.magnitudeAt!.cyclesPerSample.entries())
      expect(Math.abs(gainAt(taps, f) * scale - expected.magnitudeAt!.value[i]!)).toBeLessThan(1e-12);
    expect(symmetryOf(taps)).toBe("even");
    expect(Array.from(taps)).toEqual(Array.from(taps).reverse());
  });

  it.each(reference.cases.filter((c) => c.inputs.window === undefined))(
    "$id: near an approximation of another kind",
    ({ inputs, expected, tolerance }) => {
      const window = inputs.octaveCall!.includes("blackman") ? "blackman" : "hamming";
      const taps = designWindowedSinc({
        taps: inputs.taps,
        shape: SHAPES[inputs.passType]!,
        edges: inputs.cutoffCyclesPerSample,
        window,
      });
      for (const [n, wanted] of expected.taps.entries())
        expect(Math.abs(taps[n]! - wanted)).toBeLessThan((tolerance as { abs: number }).abs);
    },
  );
});

describe("windowed sinc", () => {
  const windows: WindowKind[] = ["rectangular", "triangular", "hann", "hamming", "blackman", "kaiser"];
  it("gain 1 where its shape says, for every window and many lengths", () => {
    for (const window of windows)
      for (const n of [5, 11, 31, 101, 401]) {
        const one = (shape: FilterShape, edges: number[], at: number) => {
          const taps = designWindowedSinc({
            taps: n,
            shape,
            edges,
            window,
            ...(window === "kaiser" ? { beta: 5 } : {}),
          });
          expect(Math.abs(gainAt(taps, at) - 1)).toBeLessThan(1e-14);
        };
        one("low-pass", [0.11], 0);
        one("high-pass", [0.2], 0.5);
        one("band-pass", [0.1, 0.33], 0.215);
        one("band-stop", [0.1, 0.33], 0);
      }
  });

  it("its edges are the -6 dB frequencies", () => {
    for (const window of ["hamming", "blackman"] as const) {
      const low = designWindowedSinc({ taps: 201, shape: "low-pass", edges: [0.1], window });
      expect(gainAt(low, 0.1)).toBeCloseTo(0.5, 3);
      expect(edgeFrequencies(low).f6[0]!).toBeCloseTo(0.1, 4);
      const band = designWindowedSinc({ taps: 201, shape: "band-pass", edges: [0.1, 0.2], window });
      expect(edgeFrequencies(band).f6).toHaveLength(2);
      expect(edgeFrequencies(band).f6[1]!).toBeCloseTo(0.2, 4);
    }
  });

  it.each(["high-pass", "band-stop"] as const)("%s of even length is refused with the reason", (shape) => {
    const edges = shape === "high-pass" ? [0.2] : [0.1, 0.2];
    try {
      designWindowedSinc({ taps: 32, shape, edges, window: "hann" });
      expect.unreachable();
    } catch (error) {
      expect(error).toBeInstanceOf(DesignError);
      const said = error as DesignError;
      expect(said.problem).toMatch(/even length is zero at the Nyquist frequency/);
      expect(said.given).toBe("32 taps");
      expect(said.allowed).toMatch(/odd/);
      expect(said.todo).toMatch(/33/);
    }
  });

  it("never answers with taps that are not numbers", () => {
    const cases = [
      { taps: 2, shape: "low-pass", edges: [0.1], window: "hann" },
      { taps: 2, shape: "low-pass", edges: [0.1], window: "triangular" },
      { taps: 0, shape: "low-pass", edges: [0.1], window: "hamming" },
      { taps: 7.5, shape: "low-pass", edges: [0.1], window: "hamming" },
      { taps: 7, shape: "low-pass", edges: [0.5], window: "hamming" },
      { taps: 7, shape: "low-pass", edges: [0], window: "hamming" },
      { taps: 7, shape: "low-pass", edges: [0.1, 0.2], window: "hamming" },
      { taps: 7, shape: "band-pass", edges: [0.2, 0.1], window: "hamming" },
      { taps: 7, shape: "band-stop", edges: [0.2], window: "hamming" },
      { taps: 7, shape: "low-pass", edges: [Number.NaN], window: "hamming" },
    ] as const;
    for (const design of cases) expect(() => designWindowedSinc(design)).toThrow(DesignError);
  });
});

describe("spectral masks of windowed sincs by size", () => {
  // Peak approximation error of one sharp edge, and width of the main lobe times N - 1 in cycles/sample:
  // Oppenheim & Schafer, Discrete-Time Signal Processing, table 7.2 (recalled from memory). A filter has each edge
  // twice, at f and at -f, so the errors of two edges can add up.
  const table: [WindowKind, number, number][] = [
    ["rectangular", 21, 2],
    ["triangular", 25, 4],
    ["hann", 44, 4],
    ["hamming", 53, 4],
    ["blackman", 74, 6],
  ];
  it.each(table)("%s: %d dB beyond half its main lobe's width", (window, attenuation_dB, width) => {
    for (const n of [31, 64, 101, 257])
      for (const edge of [0.12, 0.25, 0.33]) {
        const half = width / (2 * (n - 1));
        if (edge - half <= 0.02 || edge + half >= 0.48) continue;
        const low = designWindowedSinc({ taps: n, shape: "low-pass", edges: [edge], window });
        const leak = 2 * 10 ** (-attenuation_dB / 20);
        expect(peakGain(low, edge + half, 0.5).gain, `${n} ${edge}`).toBeLessThan(leak);
        // The passband's own error, and that of the frequency at which the gain is set to 1.
        expect(Math.abs(peakGain(low, 0, edge - half).gain - 1)).toBeLessThan(2.1 * leak);
        expect(Math.abs(lowestGain(low, 0, edge - half).gain - 1)).toBeLessThan(2.1 * leak);
        if (n % 2 === 0) continue;
        const high = designWindowedSinc({ taps: n, shape: "high-pass", edges: [edge], window });
        expect(peakGain(high, 0, edge - half).gain, `${n} ${edge}`).toBeLessThan(leak);
        expect(Math.abs(lowestGain(high, edge + half, 0.5).gain - 1)).toBeLessThan(2.1 * leak);
      }
  });
});
