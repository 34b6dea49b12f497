import { describe, expect, it } from "vitest";
import { measureTiming } from "../../src/engine/timing.ts";
import type { RowBlock } from "../../src/logs/rows.ts";

const record =
  (times: number[], cut = 1000) =>
  (): RowBlock[] => {
    const blocks: RowBlock[] = [];
    for (let i = 0; i < times.length; i += cut) {
      const part = Float64Array.from(times.slice(i, i + cut));
      blocks.push({ count: part.length, times: part, columns: [] });
    }
    return blocks;
  };

describe("timing", () => {
  it("finds the interval, drift and jitter of a clock, and its gaps", () => {
    const times: number[] = [];
    for (let i = 0; i < 20_000; i++) {
      if (i > 5000 && i < 5100) continue;
      times.push(1e15 + Math.round(i * 1_000_035 + ((i * 7919) % 2001) - 1000));
    }
    const t = measureTiming(record(times))!;
    expect(t.fitted_us!).toBeCloseTo(1_000_035, 1);
    // Standard deviation of whole numbers spread evenly over -1000 … 1000.
    expect(t.jitterSd_us!).toBeGreaterThan(570);
    expect(t.jitterSd_us!).toBeLessThan(585);
    expect(t.gapCount).toBe(1);
    expect(t.gaps[0]!.to_us - t.gaps[0]!.from_us).toBeCloseTo(100 * 1_000_035, -4);
  });

  it("is not misled by stamps rounded to whole milliseconds, gaps included", () => {
    const times: number[] = [];
    for (let i = 0; i < 70_000; i++) {
      if (i > 20_000 && i < 20_513) continue;
      times.push(Math.round(i * 7.8125) * 1000);
    }
    const t = measureTiming(record(times))!;
    expect(t.nominal_us).toBe(8000);
    expect(t.fitted_us!).toBeCloseTo(7812.5, 3);
    expect(t.jitterSd_us!).toBeLessThan(330);
  });

  it("takes the exact lower median of the steps, however the rows are cut", () => {
    const steps = Array.from({ length: 2001 }, (_, i) => 1 + ((i * 104_729) % 1_000_003));
    const times = [0];
    for (const s of steps) times.push(times.at(-1)! + s);
    const median = [...steps].sort((a, b) => a - b)[Math.floor((steps.length - 1) / 2)]!;
    for (const cut of [1, 7, 5000]) expect(measureTiming(record(times, cut))!.nominal_us).toBe(median);
  });

  it("says nothing of fewer than two rows", () => {
    expect(measureTiming(record([5]))).toBeNull();
  });
});
