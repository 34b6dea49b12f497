import { execFileSync } from "node:child_process";
import { mkdtempSync, readdirSync, readFileSync, rmSync, statSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { gunzipSync } from "node:zlib";
import { afterAll, beforeAll, describe, expect, test } from "vitest";

const root = new URL("../../sample-data/", import.meta.url).pathname;
const text = (folder: string, file: string): string => {
  const bytes = readFileSync(join(folder, file));
  return (file.endsWith(".gz") ? gunzipSync(bytes) : bytes).toString("latin1");
};
// biome-ignore lint/suspicious/noExplicitAny: the truth is read as plain JSON.
const truth: any = JSON.parse(readFileSync(join(root, "truth.json"), "utf8"));

interface Row {
  readonly file: string;
  readonly line: number;
  readonly ms: number;
  readonly cells: readonly string[];
}

/** Splits on plain line ends and commas; the big logs hold nothing harder. */
function rowsOf(name: string, inMs: (cell: string) => number): { header: string[]; rows: Row[] } {
  let header: string[] = [];
  const rows: Row[] = [];
  for (const { file } of truth.logs[name].files) {
    const lines = text(root, file).split("\n");
    expect(lines.pop()).toBe("");
    header = lines[0]!.split(",");
    lines.slice(1).forEach((line, i) => {
      const cells = line.split(",");
      expect(cells.length).toBe(header.length);
      rows.push({ file, line: i + 2, ms: inMs(cells[0]!), cells });
    });
  }
  return { header, rows };
}

/** Sorts what was found about order, repeats and gaps; `series` keeps the first row of each time. */
function audit(rows: readonly Row[], step_ms: number) {
  const first = new Map<number, Row>();
  const lines = {
    exact_duplicates: [] as unknown[],
    same_time_other_value: [] as unknown[],
    late: [] as unknown[],
  };
  let latest = Number.NEGATIVE_INFINITY;
  for (const row of rows) {
    const { file, line } = row;
    const before = first.get(row.ms);
    if (before === undefined) {
      first.set(row.ms, row);
      if (row.ms < latest) lines.late.push({ file, line });
    } else if (before.cells.join() === row.cells.join()) lines.exact_duplicates.push({ file, line });
    else lines.same_time_other_value.push({ file, line });
    latest = Math.max(latest, row.ms);
  }
  const series = [...first.values()].sort((a, b) => a.ms - b.ms);
  const gaps = series.slice(1).flatMap((row, i) => {
    const step = row.ms - series[i]!.ms;
    return step < 1.5 * step_ms
      ? []
      : [{ lost_rows: Math.round(step / step_ms) - 1, from: series[i]!.ms, to: row.ms }];
  });
  return { series, gaps, lines };
}

/** Cells of a column that are no number, by their text. */
function codes(rows: readonly Row[], column: number): Record<string, number> {
  const counts: Record<string, number> = {};
  for (const { cells } of rows) {
    const cell = cells[column]!;
    if (cell === "" || cell === "NAN" || cell === "-9999") counts[cell] = (counts[cell] ?? 0) + 1;
    else expect(cell).toMatch(/^-?\d+\.\d+$/);
  }
  return counts;
}

/** Interval, and standard deviation about it, by least squares over the count of intervals. */
function clock(series: readonly Row[], step_ms: number) {
  let n = 0;
  const places = series.map((row, i) => {
    if (i > 0) n += Math.round((row.ms - series[i - 1]!.ms) / step_ms);
    return n;
  });
  const meanN = places.reduce((a, b) => a + b) / places.length;
  const late = series.map((row, i) => row.ms - series[0]!.ms - places[i]! * step_ms);
  const meanT = late.reduce((a, b) => a + b) / late.length;
  let nn = 0;
  let nt = 0;
  places.forEach((p, i) => {
    nn += (p - meanN) ** 2;
    nt += (p - meanN) * (late[i]! - meanT);
  });
  const slope = nt / nn;
  const left = late.map((t, i) => t - meanT - slope * (places[i]! - meanN));
  return {
    drift_ppm: (slope / step_ms) * 1e6,
    sd_ms: Math.sqrt(left.reduce((s, e) => s + e * e, 0) / left.length),
  };
}

/** Amplitude at f of samples at given times, by one Hann-weighted Fourier sum. */
function amplitude(seconds: readonly number[], values: readonly number[], f: number): number {
  let re = 0;
  let im = 0;
  let weights = 0;
  const mean = values.reduce((a, b) => a + b) / values.length;
  values.forEach((v, i) => {
    const w = 0.5 - 0.5 * Math.cos((2 * Math.PI * (i + 0.5)) / values.length);
    re += w * (v - mean) * Math.cos(2 * Math.PI * f * seconds[i]!);
    im -= w * (v - mean) * Math.sin(2 * Math.PI * f * seconds[i]!);
    weights += w;
  });
  return (2 * Math.hypot(re, im)) / weights;
}

const present = (rows: readonly Row[], column: number) =>
  rows.filter((r) => !["", "NAN", "-9999"].includes(r.cells[column]!));
const inIso = (gaps: { lost_rows: number; from: number; to: number }[]) =>
  gaps.map((g) => ({ ...g, from: new Date(g.from).toISOString(), to: new Date(g.to).toISOString() }));

describe("regenerating", () => {
  let folder = "";
  beforeAll(() => {
    folder = mkdtempSync(join(tmpdir(), "sample-data-"));
    execFileSync(process.execPath, [join(root, "make.mjs"), folder]);
  });
  afterAll(() => rmSync(folder, { recursive: true, force: true }));

  test("gives the committed truth, byte for byte", () => {
    expect(readFileSync(join(folder, "truth.json")).equals(readFileSync(join(root, "truth.json")))).toBe(
      true,
    );
  });

  test("gives the committed logs, byte for byte, and no others", () => {
    const committed = readdirSync(join(root, "thurnwick")).sort();
    expect(readdirSync(join(folder, "thurnwick")).sort()).toEqual(committed);
    // The text inside gzip is compared: compressed bytes may change with the compressor's release.
    for (const file of committed)
      expect(text(join(folder, "thurnwick"), file) === text(join(root, "thurnwick"), file), file).toBe(true);
  });

  test("stays within 5.5 MB", () => {
    const sizes = readdirSync(join(root, "thurnwick")).map((f) => statSync(join(root, "thurnwick", f)).size);
    expect(sizes.reduce((a, b) => a + b)).toBeLessThan(5.5e6);
  });
});

describe("level", () => {
  const known = truth.logs.level;
  const { header, rows } = rowsOf("level", Date.parse);
  const { series, gaps, lines } = audit(rows, 1000);

  test("rows, repeats, disorder and gaps are as stated", () => {
    expect(header).toEqual(Object.keys(known.columns));
    expect(rows.length).toBe(known.rows.written);
    expect(series.length).toBe(known.rows.scheduled - known.rows.lost);
    expect(lines).toEqual(known.lines);
    expect(lines.exact_duplicates.length).toBe(known.rows.exact_duplicates);
    expect(lines.same_time_other_value.length).toBe(known.rows.same_time_other_value);
    expect(lines.late.length).toBe(known.rows.late);
    expect(inIso(gaps)).toEqual(known.gaps);
  });

  test("missing codes are as stated", () => {
    expect(codes(series, 1)).toEqual(known.missing.LEVEL_M);
    expect(codes(series, 2)).toEqual(known.missing.INFLOW_M3S);
  });

  test("the clock drifts and jitters as stated", () => {
    const { drift_ppm, sd_ms } = clock(series, 1000);
    expect(drift_ppm).toBeCloseTo(known.clock.drift_ppm, 1);
    expect(sd_ms).toBeGreaterThan(0.98 * known.clock.jitter_sd_ms);
    expect(sd_ms).toBeLessThan(1.02 * known.clock.jitter_sd_ms);
  });

  test("the seiche and the pumping cycle have the stated size", () => {
    // From after the 20 min gap to before the 2 min one; lost rows between are bridged by a line, since a
    // hole in a swing of 0.3 m would outshine a seiche of 4 mm.
    const from = Date.parse("2031-03-03T19:30:00Z") / 1000;
    const part = present(series, 1);
    const t = Array.from({ length: 19_000 }, (_, i) => from + i);
    let at = 0;
    const v = t.map((second) => {
      while (part[at + 1]!.ms <= 1000 * second) at++;
      const [a, b] = [part[at]!, part[at + 1]!];
      const [va, vb] = [Number(a.cells[1]), Number(b.cells[1])];
      return va + ((vb - va) * (1000 * second - a.ms)) / (b.ms - a.ms);
    });
    const seiche = amplitude(t, v, known.level.seiche.frequency_Hz);
    expect(Math.abs(seiche - known.level.seiche.amplitude_m)).toBeLessThan(0.0002);
    // High minus low of one pumping cycle; the tide bends it by up to 0.023 m.
    const { period_s, amplitude_m } = known.level.pumping;
    const mean = (i: number) => v.slice(i, i + 60).reduce((a, b) => a + b) / 60;
    const quarter = period_s / 4;
    const start = Math.round((Date.parse("2031-03-03T20:30:00Z") / 1000 - from) / 60) * 60;
    const high = mean(start - 30);
    const low = mean(start + 2 * quarter - 30);
    const nextHigh = mean(start + 4 * quarter - 30);
    expect(Math.abs((high + nextHigh) / 2 - low - 2 * amplitude_m)).toBeLessThan(0.03);
  });

  test("the slosh has the stated size", () => {
    // Second differences of the slow level are below 1 mm; those of a wave near f grow by 4 sin^2(pi f).
    const values = series.map((r) => Number(r.cells[1] === "NAN" ? "-9999" : r.cells[1]));
    const differences = values
      .slice(2)
      .map((v, i) =>
        values[i]! < 0 || values[i + 1]! < 0 || v < 0 ? 0 : values[i]! - 2 * values[i + 1]! + v,
      );
    const rms = Math.sqrt(differences.reduce((s, d) => s + d * d, 0) / differences.length);
    const { frequency_Hz, rms_drawn_m } = known.level.slosh;
    const expected = 4 * Math.sin(Math.PI * frequency_Hz) ** 2 * rms_drawn_m;
    expect(Math.abs(rms / expected - 1)).toBeLessThan(0.03);
  });
});

describe("vibration", () => {
  const known = truth.logs.vibration;
  const { header, rows } = rowsOf("vibration", Number);
  const { series, gaps, lines } = audit(rows, 7.8125);
  // The first 64 s are whole: 8192 rows, evenly 1/128 s apart whatever the stamps say.
  const part = series.slice(0, 8192).map((r) => Number(r.cells[1]));
  const seconds = part.map((_, i) => i / known.clock.rate_Hz);

  test("rows, repeats, gaps and missing codes are as stated", () => {
    expect(header).toEqual(Object.keys(known.columns));
    expect(rows.length).toBe(known.rows.written);
    expect(lines.exact_duplicates.length).toBe(known.rows.exact_duplicates);
    expect(lines.same_time_other_value).toEqual([]);
    expect(lines.late).toEqual([]);
    expect(inIso(gaps)).toEqual(known.gaps);
    expect(codes(series, 1)).toEqual(known.missing.BEARING_MM_S);
    expect(part.every(Number.isFinite)).toBe(true);
  });

  test("every stamp is the nearest millisecond to its sample", () => {
    const start = Date.parse(known.clock.start);
    for (const { ms } of series) {
      const k = Math.round(((ms - start) * known.clock.rate_Hz) / 1000);
      expect(Math.abs(ms - start - (1000 * k) / known.clock.rate_Hz)).toBeLessThanOrEqual(0.5);
    }
  });

  test("shaft and hum have the stated size, and 100 Hz shows at 28 Hz", () => {
    const { shaft, hum, second_hum } = known.bearing;
    expect(amplitude(seconds, part, shaft.frequency_Hz)).toBeCloseTo(shaft.amplitude_mm_s, 2);
    expect(amplitude(seconds, part, hum.frequency_Hz)).toBeCloseTo(hum.amplitude_mm_s, 2);
    const { shows_at_Hz } = known.folds.second_hum_in_the_logger;
    expect(shows_at_Hz).toBe(28);
    expect(amplitude(seconds, part, shows_at_Hz)).toBeCloseTo(second_hum.amplitude_mm_s, 2);
  });

  test("keeping every 8th sample puts the hum where it is stated", () => {
    const kept = part.filter((_, i) => i % 8 === 0);
    const at = kept.map((_, i) => i / 16);
    const { hum_if_every_8th_is_kept: hum, second_hum_if_every_8th_is_kept: second } = known.folds;
    expect(hum.lands_at_Hz).toBe(2);
    expect(second.lands_at_Hz).toBe(4);
    expect(amplitude(seconds, part, hum.lands_at_Hz)).toBeLessThan(0.01);
    expect(amplitude(at, kept, hum.lands_at_Hz)).toBeCloseTo(known.bearing.hum.amplitude_mm_s, 1);
    expect(amplitude(at, kept, second.lands_at_Hz)).toBeCloseTo(known.bearing.second_hum.amplitude_mm_s, 1);
  });
});

describe("temperature", () => {
  const known = truth.logs.temperature;
  const { header, rows } = rowsOf("temperature", (cell) => 1000 * Number(cell));
  const { series, gaps, lines } = audit(rows, 60_000);

  test("rows, gaps and missing cells are as stated", () => {
    expect(header).toEqual(Object.keys(known.columns));
    expect(rows.length).toBe(known.rows.written);
    expect(lines).toEqual({ exact_duplicates: [], same_time_other_value: [], late: [] });
    expect(inIso(gaps)).toEqual(known.gaps);
    expect(codes(series, 1)).toEqual(known.missing.WATER_C);
    expect(clock(series, 60_000).drift_ppm).toBeCloseTo(known.clock.drift_ppm, 1);
  });

  test("cycles, drift and jump have the stated size", () => {
    const { daily, half_daily, heater, jump, drift_degC, mean_degC } = known.water;
    const start = Date.parse(known.clock.start);
    const days = (ms: number) => (ms - start) / 8.64e7;
    const rowsIn = (from: number, to: number) =>
      present(series, 1).filter((r) => days(r.ms) >= from && days(r.ms) < to);
    const part = rowsIn(1, 9);
    const t = part.map((r) => r.ms / 1000);
    const v = part.map((r) => Number(r.cells[1]));
    expect(Math.abs(amplitude(t, v, 1 / daily.period_s) - daily.amplitude_degC)).toBeLessThan(0.02);
    expect(amplitude(t, v, 1 / half_daily.period_s)).toBeCloseTo(half_daily.amplitude_degC, 2);
    expect(amplitude(t, v, 1 / heater.period_s)).toBeCloseTo(heater.amplitude_degC, 2);
    // The mean of a whole day is free of the cycles.
    const dayMean = (day: number) => {
      const values = rowsIn(day, day + 1).map((r) => Number(r.cells[1]));
      return values.reduce((a, b) => a + b) / values.length;
    };
    for (const day of [0, 5, 12, 16, 21, 25, 29]) {
      const x = (day + 0.5) / 30;
      const after = day > days(Date.parse(jump.at));
      const expected = mean_degC + drift_degC.x * x + drift_degC.x2 * x * x + (after ? jump.height_degC : 0);
      expect(Math.abs(dayMean(day) - expected), `day ${day}`).toBeLessThan(0.01);
    }
  });
});
