/** What folds when samples are dropped: refused on the design, found on the data, with where it lands. */
import { describe, expect, it } from "vitest";
import { DiagnosticError } from "../../src/diagnostics.ts";
import { brokenAliasLimits } from "../../src/engine/run-chain.ts";
import { SUSPECT } from "../../src/signal/marks.ts";
import reference from "../reference/16-alias-frequency.json" with { type: "json" };
import { type Entry, evenRows, planOf, run } from "./harness.ts";

const SECONDS: Entry = { stage: "resample", interval: "1 s" };
const UNGUARDED = { "anti-alias": "upstream", "accept-aliasing": true };

/** Slow waves and faint noise, the same every time. */
function quiet(n: number): Float64Array {
  let seed = 12_345;
  return Float64Array.from({ length: n }, (_, i) => {
    seed = (seed * 16807) % 2147483647;
    return 0.5 * Math.sin(i / 40) + 0.01 * (seed / 2147483647 - 0.5);
  });
}

const withTone = (x: Float64Array, f: number, amplitude: number) =>
  x.map((v, i) => v + amplitude * Math.sin(2 * Math.PI * f * i + 0.3));

describe("on the data", () => {
  const plan = planOf([SECONDS, { stage: "decimate", by: 8 }]);
  const alias = plan.stages[0]!.design.alias!;

  it("the filter is right by design, and quiet data keep the limit", () => {
    expect(alias.met).toBe(true);
    const { results } = run(plan, evenRows(quiet(20_000), 1e6));
    expect(results[0]!.measures[0]!.alias!.measure()!.ratio_dB).toBeLessThan(alias.limit_dB);
    expect(brokenAliasLimits(plan, results).size).toBe(0);
  });

  it.each([
    [0.113, 0.012],
    [0.2043, 0.0457],
    [0.2771, 0.0271],
    [0.3377, 0.0373],
    [0.4903, 0.0097],
  ])("a strong tone at %f Hz breaks the limit, and is named with where it lands, %f Hz", (f, lands) => {
    const x = withTone(quiet(20_000), f, 300);
    const { results } = run(plan, evenRows(x, 1e6));
    const measured = results[0]!.measures[0]!.alias!.measure()!;
    const bin = 1 / 1024;
    expect(measured.ratio_dB).toBeGreaterThan(alias.limit_dB);
    expect(Math.abs(measured.source_Hz - f)).toBeLessThan(2 * bin);
    expect(Math.abs(measured.landsAt_Hz - lands)).toBeLessThan(2 * bin);
    expect(measured.band.from_Hz).toBeLessThanOrEqual(measured.landsAt_Hz);
    expect(measured.band.to_Hz).toBeGreaterThanOrEqual(measured.landsAt_Hz);
    expect([...brokenAliasLimits(plan, results)]).toEqual([0]);
    // A second run marks every value of the stage suspect.
    const again = run(plan, evenRows(x, 1e6), { suspect: brokenAliasLimits(plan, results) });
    again.clean[0]!.forEach((v, i) => expect((again.marks[0]![i]! & SUSPECT) !== 0).toBe(!Number.isNaN(v)));
    expect(again.clean).toEqual(run(plan, evenRows(x, 1e6)).clean);
  });

  it.each([40, 80, 160, 360, 640])("white noise in a record of only %i samples keeps the limit", (n) => {
    let seed = n;
    const draw = () => {
      seed = (seed * 16807) % 2147483647;
      return seed / 2147483647 - 0.5;
    };
    const { results } = run(plan, evenRows(Float64Array.from({ length: n }, draw), 1e6));
    const measured = results[0]!.measures[0]!.alias!.measure();
    // 80 dB by design; the width of a bin on the filter's skirt may cost some of it.
    expect(measured?.ratio_dB ?? -400).toBeLessThan(-70);
  });

  it("a record that shows no bin of the band kept is not judged", () => {
    const open = planOf([SECONDS, { stage: "decimate", by: 1000, ...UNGUARDED }]);
    const { results } = run(open, evenRows(quiet(200), 1e6));
    expect(results[0]!.measures[0]!.alias!.measure()).toBeNull();
  });

  it("a tone that lands outside the band kept does no harm there", () => {
    // 0.125 * 2 - 0.055 = 0.195 Hz lands on 0.055 Hz; kept is 0 to 0.05 Hz.
    const { results } = run(plan, evenRows(withTone(quiet(20_000), 0.195, 30), 1e6));
    expect(brokenAliasLimits(plan, results).size).toBe(0);
  });

  it("is the same with an account kept or without, and for any block size", () => {
    const x = withTone(quiet(6000), 0.2771, 300);
    const kept = planOf([SECONDS, { stage: "decimate", by: 8 }, { stage: "report" }]);
    const measure = (p: typeof plan, blockRows: number) =>
      run(p, evenRows(x, 1e6), { blockRows }).results[0]!.measures[0]!.alias!.measure();
    const whole = measure(plan, 65_536);
    for (const blockRows of [7, 1000]) expect(measure(plan, blockRows)).toEqual(whole);
    expect(measure(kept, 1000)).toEqual(whole);
  });

  it("the ratio is that of powers: a hundredth of the amplitude is 40 dB less", () => {
    const at = (amplitude: number) =>
      run(
        plan,
        evenRows(withTone(quiet(20_000), 0.2771, amplitude), 1e6),
      ).results[0]!.measures[0]!.alias!.measure()!.ratio_dB;
    // The slow wave and the tone's own leakage stand in other bands.
    expect(at(3000) - at(300)).toBeGreaterThan(15);
    expect(at(3000) - at(300)).toBeLessThan(20.5);
  });
});

describe("where a tone lands (reference 16)", () => {
  // Sampled 4 times as fast first, so that the tone is there to be seen; bands up to 0.4 of the new rate are kept.
  const seen = reference.cases.filter(({ inputs, expected }) => {
    const { toneHz: f, sampleHz: fs } = inputs;
    return f > fs / 2 && f < 2 * fs && expected.apparentHz < 0.39 * fs;
  });

  it("has cases to try", () => expect(seen.length).toBeGreaterThanOrEqual(4));

  it.each(seen)("$id", ({ inputs, expected }) => {
    const { toneHz: f, sampleHz: fs } = inputs;
    const interval_us = Math.round(1e6 / (4 * fs));
    const plan = planOf([
      { stage: "resample", interval: `${interval_us} us` },
      { stage: "decimate", by: 4, ...UNGUARDED },
    ]);
    const x = withTone(quiet(8192), f * interval_us * 1e-6, 5);
    const { results } = run(plan, evenRows(x, interval_us));
    const measured = results[0]!.measures[0]!.alias!.measure()!;
    const bin = (4 * fs) / 512;
    expect(Math.abs(measured.source_Hz - f)).toBeLessThanOrEqual(bin);
    expect(Math.abs(measured.landsAt_Hz - expected.apparentHz)).toBeLessThanOrEqual(bin);
    expect(brokenAliasLimits(plan, results).size).toBe(1);
  });
});

describe("on the design", () => {
  const refusal = (chain: readonly Entry[]) => {
    try {
      planOf(chain);
    } catch (error) {
      if (error instanceof DiagnosticError) return error.diagnostics;
      throw error;
    }
    return [];
  };

  it("dropping samples without a filter is refused, with what would fold where", () => {
    const [found] = refusal([SECONDS, { stage: "decimate", by: 8, "anti-alias": "upstream" }]);
    expect(found!.code).toBe("aliases-on-design");
    expect(found!.problem).toMatch(/would fold 0\.\d+ Hz to 0(\.\d+)? Hz at 0\.0 dB/);
    expect(found!.todo).toContain("anti-alias: designed");
  });

  it("a moving average of the new interval's length is not enough", () => {
    for (const points of [8, 9, 16, 31]) {
      const found = refusal([
        SECONDS,
        { stage: "moving-average", points },
        { stage: "decimate", by: 8, "anti-alias": "upstream" },
      ]);
      expect(found.map((d) => d.code)).toEqual(["aliases-on-design"]);
    }
  });

  it("a filter that reaches the limit is, and acceptance in writing is recorded", () => {
    const filter = {
      stage: "fir",
      shape: "low-pass",
      pass: "0.04 Hz",
      stop: "0.075 Hz",
      attenuation: "61 dB",
    };
    expect(refusal([SECONDS, filter, { stage: "decimate", by: 8, "anti-alias": "upstream" }])).toEqual([]);
    const { alias } = planOf([SECONDS, { stage: "decimate", by: 8, ...UNGUARDED }]).stages[0]!.design;
    expect(alias).toMatchObject({ accepted: true, met: false, antiAlias: "upstream", limit_dB: -60 });
    expect(alias!.keptTo_Hz).toBe(0.05);
  });
});
