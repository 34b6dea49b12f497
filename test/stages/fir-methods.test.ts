/** The ways to say what a filter is, against published designs (test/reference 05 to 08). */
import { describe, expect, it } from "vitest";
import { DiagnosticError } from "../../src/diagnostics.ts";
import { type Entry, evenRows, planOf, run } from "../engine/harness.ts";
import averages from "../reference/08-published-weighted-averages.json" with { type: "json" };

const GRID: Entry = { stage: "resample", interval: "1 s" };
const taps = (stage: Entry): Float64Array => planOf([GRID, stage]).stages[0]!.design.taps!;

function codes(stage: Entry): string[] {
  try {
    planOf([GRID, stage]);
    return [];
  } catch (error) {
    if (!(error instanceof DiagnosticError)) throw error;
    return error.diagnostics.map((d) => d.code);
  }
}

describe("fir", () => {
  it("by specification: auto takes the shortest, and every method keeps what was asked", () => {
    const spec = {
      stage: "fir",
      shape: "low-pass",
      pass: "0.08 Hz",
      stop: "0.16 Hz",
      ripple: "0.1 dB",
      attenuation: "60 dB",
    };
    const lengths = Object.fromEntries(
      ["auto", "windowed-sinc", "equiripple", "least-squares"].map((method) => [
        method,
        taps({ ...spec, method }).length,
      ]),
    );
    // auto leaves a steady level where it is, which equiripple alone does not: two taps more here.
    expect(lengths["auto"]! - lengths["equiripple"]!).toBe(2);
    expect(lengths["auto"]!).toBeLessThan(lengths["windowed-sinc"]!);
    const sum = taps({ ...spec, method: "auto" }).reduce((a, w) => a + w, 0);
    expect(Math.abs(sum - 1)).toBeLessThan(1e-14);
    expect(lengths["equiripple"]!).toBeLessThan(lengths["windowed-sinc"]!);
    expect(lengths["least-squares"]!).toBeLessThanOrEqual(lengths["windowed-sinc"]!);
  });

  it("by bands: the 24-tap low-pass of McClellan, Parks & Rabiner 1973 (recalled from memory)", () => {
    const h = taps({
      stage: "fir",
      taps: 24,
      method: "equiripple",
      bands: [
        { from: "0 Hz", to: "0.08 Hz", gain: 1 },
        { from: "0.16 Hz", to: "0.5 Hz", gain: 0 },
      ],
    });
    const published = [0.003374091, 0.014938299, 0.01056936, 0.002541507, -0.01592999, -0.034085343];
    for (const [i, w] of published.entries()) expect(Math.abs(h[i]! - w)).toBeLessThan(1e-4);
  });

  it("savitzky-golay: the published 5-point quadratic, and its trailing end fits a parabola exactly", () => {
    const h = taps({ stage: "fir", method: "savitzky-golay", taps: 5, degree: 2 });
    for (const [i, w] of [-3, 12, 17, 12, -3].entries()) expect(h[i]!).toBeCloseTo(w / 35, 13);
    const x = Float64Array.from({ length: 50 }, (_, i) => 3 - 2 * i + 0.5 * i * i);
    const plan = planOf([
      GRID,
      { stage: "fir", method: "savitzky-golay", taps: 7, degree: 2, reach: "past-only" },
    ]);
    const { clean, first } = run(plan, evenRows(x, 1_000_000));
    for (let k = 6; k < 50; k++) expect(clean[0]![k - first]!).toBeCloseTo(x[k]!, 9);
  });

  it("names each mistake", () => {
    const low = { stage: "fir", shape: "low-pass" };
    const bands = [
      { from: "0 Hz", to: "0.1 Hz", gain: 1 },
      { from: "0.2 Hz", to: "0.5 Hz", gain: 0 },
    ];
    expect(codes({ stage: "fir", method: "savitzky-golay", taps: 6, degree: 2 })).toEqual([
      "savitzky-golay-size",
    ]);
    expect(codes({ stage: "fir", method: "savitzky-golay", taps: 5, degree: 5 })).toEqual([
      "savitzky-golay-size",
    ]);
    expect(codes({ stage: "fir", method: "savitzky-golay", taps: 5, degree: 2, edge: "0.1 Hz" })).toEqual([
      "fir-method",
    ]);
    expect(codes({ ...low, method: "savitzky-golay", pass: "0.1 Hz", stop: "0.2 Hz" })).toEqual([
      "fir-method",
    ]);
    expect(codes({ ...low, method: "equiripple", taps: 21, edge: "0.1 Hz" })).toEqual(["fir-method"]);
    expect(codes({ stage: "fir", taps: 21, bands })).toEqual(["fir-method"]);
    expect(codes({ stage: "fir", method: "equiripple", taps: 21, bands: [bands[1]!, bands[0]!] })).toEqual([
      "band-limits",
    ]);
    expect(codes({ ...low, method: "equiripple", taps: 21, bands })).toEqual(["fir-way"]);
    expect(codes({ stage: "fir", method: "equiripple", bands })).toEqual(["missing-setting"]);
  });
});

describe("moving-average by name", () => {
  it("uses the published weights, and smooths as the reference does", () => {
    for (const c of averages.cases) {
      const name = { spencer15: "spencer-15", spencer21: "spencer-21", henderson5: "henderson-5" }[c.id];
      if (name === undefined) continue;
      const expected = c.expected as { weightsFloat: number[] };
      const h = taps({ stage: "moving-average", weights: name });
      for (const [i, w] of expected.weightsFloat.entries()) expect(h[i]!).toBeCloseTo(w, 14);
    }
    expect(codes({ stage: "moving-average", weights: "henderson-6" })).toEqual(["unknown-weights"]);
  });
});
