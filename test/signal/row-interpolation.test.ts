import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { type Grid, intervalSeconds, makeGrid, timeOf, timeSince } from "../../src/signal/grid.ts";
import type { GridBlock } from "../../src/signal/grid-block.ts";
import { FILLED, MISSING } from "../../src/signal/marks.ts";
import { type Between, RowInterpolator } from "../../src/signal/row-interpolation.ts";

function resample(
  grid: Grid,
  between: Between,
  longestGap: number,
  t: number[],
  v: number[],
  block = t.length,
) {
  const rows = new RowInterpolator(grid, between, longestGap);
  const out: GridBlock[] = [];
  for (let i = 0; i < t.length; i += block) {
    const times = Float64Array.from(t.slice(i, i + block));
    rows.push(times, Float64Array.from(v.slice(i, i + block)), times.length, (b) => out.push(b));
  }
  rows.flush((b) => out.push(b));
  return {
    first: out[0]?.first ?? Number.NaN,
    values: out.flatMap((b) => Array.from(b.values)),
    marks: out.flatMap((b) => Array.from(b.marks)),
  };
}

/** Naive twin: looks at all rows for each grid time. Whole-microsecond grids only. */
function twin(grid: Grid, between: Between, longestGap: number, t: number[], v: number[]) {
  const half = between === "straight-line" ? 0 : (intervalSeconds(grid) * 1e6) / 2;
  const rows = t.map((time, i) => ({ time, value: v[i]! })).filter((r) => !Number.isNaN(r.value));
  const out: { k: number; value: number; mark: number }[] = [];
  const interval = intervalSeconds(grid) * 1e6;
  for (let k = Math.ceil((t[0]! - half) / interval); timeOf(grid, k) <= t.at(-1)! + half; k++) {
    const at = timeOf(grid, k);
    const before = rows.filter((r) => r.time <= at).at(-1);
    const after = rows.find((r) => r.time >= at);
    let value = Number.NaN;
    let mark = MISSING;
    const gap =
      before !== undefined && after !== undefined ? after.time - before.time : Number.POSITIVE_INFINITY;
    if (before?.time === at) [value, mark] = [before.value, 0];
    else if (gap <= longestGap && before !== undefined && after !== undefined) {
      mark = gap > 1.5 * interval ? FILLED : 0;
      const u = (at - before.time) / gap;
      const late = at - before.time > after.time - at;
      value =
        between === "straight-line"
          ? before.value + (after.value - before.value) * u
          : late
            ? after.value
            : before.value;
      if (between === "nearest-sample" && Math.min(at - before.time, after.time - at) <= half) mark = 0;
    } else if (between === "nearest-sample") {
      const b = before === undefined ? Number.POSITIVE_INFINITY : at - before.time;
      const a = after === undefined ? Number.POSITIVE_INFINITY : after.time - at;
      if (Math.min(a, b) <= half) [value, mark] = [b <= half ? before!.value : after!.value, 0];
    }
    out.push({ k, value, mark });
  }
  return { first: out[0]?.k ?? Number.NaN, values: out.map((o) => o.value), marks: out.map((o) => o.mark) };
}

describe("rows onto a grid", () => {
  it("agrees with a naive twin, however the rows are cut up", () => {
    fc.assert(
      fc.property(
        fc.constantFrom("straight-line" as const, "nearest-sample" as const),
        fc.constantFrom(1000, 2500, 6000),
        fc.array(
          fc.record({
            step: fc.oneof(
              fc.integer({ min: 1, max: 2200 }),
              fc.integer({ min: 1, max: 9000 }),
              fc.constant(1000),
              fc.constant(500),
            ),
            value: fc.oneof(
              { weight: 4, arbitrary: fc.integer({ min: -99, max: 99 }) },
              { weight: 1, arbitrary: fc.constant(Number.NaN) },
            ),
          }),
          { minLength: 2, maxLength: 30 },
        ),
        fc.integer({ min: -20_000, max: 20_000 }),
        fc.constantFrom(1, 3),
        (between, longestGap, rows, start, block) => {
          const grid = makeGrid(1000, 1);
          let time = start;
          const t = rows.map((r) => (time += r.step));
          const v = rows.map((r) => r.value);
          const expected = twin(grid, between, longestGap, t, v);
          const got = resample(grid, between, longestGap, t, v);
          expect(got.marks).toEqual(expected.marks);
          if (expected.values.length > 0) expect(got.first).toBe(expected.first + 0);
          got.values.forEach((x, i) => {
            if (Number.isNaN(expected.values[i]!)) expect(x).toBeNaN();
            else expect(Math.abs(x - expected.values[i]!)).toBeLessThan(1e-11);
          });
          expect(resample(grid, between, longestGap, t, v, block)).toEqual(got);
        },
      ),
      { numRuns: 3000 },
    );
  });

  it("takes a stamp rounded to the microsecond for the grid time itself, first and last included", () => {
    const grid = makeGrid(25_000, 9);
    const t = Array.from({ length: 1000 }, (_, k) => Math.round(timeSince(grid, k, 0)));
    const v = t.map((_, i) => i);
    for (const between of ["straight-line", "nearest-sample"] as const) {
      const got = resample(grid, between, 6000, t, v);
      expect(got.first).toBe(0);
      expect(got.values).toEqual(v);
      expect(new Set(got.marks)).toEqual(new Set([0]));
    }
  });
});
