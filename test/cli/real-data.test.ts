/**
 * The whole job on open data, through the command line as a process. Reference figures: test/reference/23
 * (numpy 1.24, scipy 1.10: firwin, convolve) and 13; origin of the data: test/data/origin.json.
 */
import { createHash } from "node:crypto";
import { readFileSync } from "node:fs";
import { join } from "node:path";
import { beforeAll, describe, expect, it } from "vitest";
import facts from "../reference/23-real-data-facts.json" with { type: "json" };
import { account, forebay, place, put, ROOT, rows } from "./harness.ts";

const DATA = join(ROOT, "test", "data");
const folder = place();

interface EcgFacts {
  time: { rows: number; medianStep: number; span: number; stepsLongerThan1p5Median: number };
  channels: { ecg_mv: { min: number; max: number; mean: number; sd: number } };
  firwin101_lp40Hz: { n: number; first3: number[]; last: number; sum: number };
}

describe("heart trace, 360 Hz", () => {
  const expected = facts.cases.find((c) => c.id === "ecg_360hz.csv")!.expected as unknown as EcgFacts;

  beforeAll(() => {
    put(
      folder,
      "ecg.yaml",
      `name: ecg
logs: { files: ${DATA}/ecg_360hz.csv.gz, time: { column: t_s, form: unix-s } }
channels: { ecg: { column: ecg_mv, unit: mV } }
chain:
  - { stage: resample, rate: 360 Hz, between: nearest-sample }
  - { stage: fir, shape: low-pass, taps: 101, edge: 40 Hz, window: hamming }
  - { stage: report, resolution: 0.3515625 Hz }
writes: { folder: out }
`,
    );
    const run = forebay(folder, "clean", "ecg.yaml");
    expect(run.stderr).not.toMatch(/error|fault/);
    expect(run.status).toBe(0);
  });

  it("finds the rows, the interval and no gap", () => {
    const a = account(folder, "out", "ecg.account.json");
    expect(a.inputs[0]!.rows.read).toBe(expected.time.rows);
    expect(a.inputs[0]!.rows.used).toBe(expected.time.rows);
    expect(a.timing!.nominal_interval_s).toBe(expected.time.medianStep);
    expect(a.timing!.fitted_interval_s).toBeCloseTo(1 / 360, 12);
    expect(a.timing!.gap_count).toBe(expected.time.stepsLongerThan1p5Median);
    expect(a.stages[0]!.out.samples).toBe(expected.time.rows);
    const bytes = readFileSync(join(DATA, "ecg_360hz.csv.gz"));
    expect(a.inputs[0]!.sha256).toBe(createHash("sha256").update(bytes).digest("hex"));
  });

  it("gives the filtered series of the reference, sample for sample where it is printed", () => {
    const y = rows(folder, "out", "ecg.clean.csv")
      .map((r) => r[1]!)
      .filter((cell) => cell !== "")
      .map(Number);
    const { n, first3, last, sum } = expected.firwin101_lp40Hz;
    expect(y.length).toBe(n);
    first3.forEach((v, i) => expect(y[i]!).toBeCloseTo(v, 12));
    expect(y.at(-1)!).toBeCloseTo(last, 12);
    expect(Math.abs(y.reduce((a, b) => a + b, 0) / sum - 1)).toBeLessThan(1e-9);
  });

  it("keeps the extremes of the input, with their times", () => {
    const c = account(folder, "out", "ecg.account.json").stages[1]!.channels["ecg"]!;
    expect(c.extremes!.highest_in!.value).toBe(expected.channels.ecg_mv.max);
    expect(c.extremes!.lowest_in!.value).toBe(expected.channels.ecg_mv.min);
    expect(c.extremes!.highest_out!.value).toBeLessThan(expected.channels.ecg_mv.max);
  });

  it("closes the books, and its spectrum integrates to the mean square of its segments", () => {
    const c = account(folder, "out", "ecg.account.json").stages[1]!.channels["ecg"]!;
    for (const b of c.bands) expect(Math.abs(b.closure!)).toBeLessThan(1e-9);
    expect(Math.abs(c.spectrum!.integral_in / c.spectrum!.mean_square_in - 1)).toBeLessThan(1e-9);
    expect(c.spectrum!.segment_samples).toBe(1024);
  });
});

describe("solar flux, uneven 2 s, and seismogram, 1 s", () => {
  it("runs on uneven steps with gaps, and counts both gaps", () => {
    put(
      folder,
      "flux.yaml",
      `name: flux
logs: { files: ${DATA}/goes15_xrs_20110607_uneven2s.csv.gz, time: { column: time_utc, form: iso-8601 } }
channels: { long: { column: xrs_b_long_wm2, unit: W/m2 }, short: { column: xrs_a_short_wm2, unit: W/m2 } }
chain:
  - { stage: resample, interval: 2.048 s }
  - { stage: moving-average, points: 61 }
  - { stage: decimate, by: 15 }
  - { stage: report }
writes: { folder: out, removed: true }
`,
    );
    expect(forebay(folder, "clean", "flux.yaml", "--quiet").status).toBe(0);
    const a = account(folder, "out", "flux.account.json");
    expect(a.inputs[0]!.rows.read).toBe(42_177);
    expect(a.timing!.gaps.map((g) => Math.round(g.length_s * 100) / 100)).toEqual([14.34, 12.29]);
    for (const s of a.stages)
      for (const c of Object.values(s.channels))
        for (const b of c.bands) expect(Math.abs(b.closure!)).toBeLessThan(1e-9);
  });

  it("puts an even centred average half-way between the samples and says so", () => {
    put(
      folder,
      "wave.yaml",
      `name: wave
logs: { files: ${DATA}/kobe_seismogram_1hz.csv, time: { column: time_utc } }
channels: { accel: { column: accel_nm_s2, unit: nm/s2 } }
chain:
  - { stage: resample, interval: 1 s }
  - { stage: moving-average, points: 4 }
  - { stage: report }
writes: { folder: out }
`,
    );
    expect(forebay(folder, "clean", "wave.yaml", "--quiet").status).toBe(0);
    const out = rows(folder, "out", "wave.clean.csv");
    const values = readFileSync(join(DATA, "kobe_seismogram_1hz.csv"), "utf8").trimEnd().split("\n").slice(1);
    const x = values.map((line) => Number(line.split(",")[1]));
    expect(out[1]![0]).toBe("1995-01-16T20:56:52.500Z");
    expect(Number(out[1]![1])).toBe((x[0]! + x[1]! + x[2]! + x[3]!) / 4);
    const s = account(folder, "out", "wave.account.json").stages[1]!;
    expect(s.delay).toEqual({ samples: 1.5, introduced_s: 1.5, compensated_s: 1.5, residual_s: 0 });
    expect(s.channels["accel"]!.basis).toBe("segment spectra");
  });
});
