import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { SincKernel } from "../../src/signal/band-limited.ts";
import { cubicAt, localCubicSlopes, monotoneCubicSlopes } from "../../src/signal/cubic-interpolation.ts";
import { makeGrid, timeOf } from "../../src/signal/grid.ts";
import type { GridBlock } from "../../src/signal/grid-block.ts";
import { cellMeans } from "../../src/signal/interpolation.ts";
import { type Curve, RowCurves } from "../../src/signal/row-curves.ts";
import {
  localCubicWeights,
  meanPowerGainOver,
  sincWeights,
  straightLineWeights,
} from "../../src/signal/row-response.ts";

const grid = makeGrid(1000, 1);
const CURVES: Curve[] = ["monotone-cubic", "local-cubic", "band-limited", "cell-mean"];

function resample(curve: Curve, longestGap: number, t: number[], v: number[], block = t.length) {
  const rows = new RowCurves(grid, curve, longestGap);
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
    effect: rows.effect(),
  };
}

/** Runs of present rows without a step longer than the gap. */
function runs(t: number[], v: number[], longestGap: number): { t: Float64Array; y: Float64Array }[] {
  const out: { t: number[]; y: number[] }[] = [];
  let last = Number.NEGATIVE_INFINITY;
  t.forEach((time, i) => {
    if (Number.isNaN(v[i]!)) return;
    if (time - last > longestGap) out.push({ t: [], y: [] });
    out.at(-1)!.t.push(time);
    out.at(-1)!.y.push(v[i]!);
    last = time;
  });
  return out.map((r) => ({ t: Float64Array.from(r.t), y: Float64Array.from(r.y) }));
}

describe("rows onto a grid by curves", () => {
  it("agrees with the whole-run forms, and does not depend on how the rows are cut up", () => {
    fc.assert(
      fc.property(
        fc.constantFrom("monotone-cubic" as const, "local-cubic" as const, "cell-mean" as const),
        fc.constantFrom(2500, 6000),
        fc.array(
          fc.record({
            step: fc.oneof(
              fc.integer({ min: 1, max: 2200 }),
              fc.integer({ min: 1, max: 9000 }),
              fc.constant(1000),
            ),
            value: fc.oneof(
              { weight: 5, arbitrary: fc.integer({ min: -99, max: 99 }) },
              { weight: 1, arbitrary: fc.constant(Number.NaN) },
            ),
          }),
          { minLength: 2, maxLength: 40 },
        ),
        fc.integer({ min: -20_000, max: 20_000 }),
        fc.constantFrom(1, 3),
        (curve, longestGap, rows, start, block) => {
          let time = start;
          const t = rows.map((r) => (time += r.step));
          const v = rows.map((r) => r.value);
          const got = resample(curve, longestGap, t, v);
          expect(resample(curve, longestGap, t, v, block)).toEqual(got);
          const parts = runs(t, v, longestGap);
          got.values.forEach((y, i) => {
            const at = timeOf(grid, got.first + i);
            const run = parts.find((r) => at >= r.t[0]! && at <= r.t.at(-1)!);
            let expected = Number.NaN;
            if (run !== undefined && curve === "cell-mean")
              expected = cellMeans(run.t, run.y, Float64Array.of(at - 500, at + 500))[0]!;
            else if (run !== undefined) {
              const slopes = curve === "monotone-cubic" ? monotoneCubicSlopes : localCubicSlopes;
              expected = run.t.length === 1 ? run.y[0]! : cubicAt(run.t, run.y, slopes(run.t, run.y), at);
            }
            if (Number.isNaN(expected)) expect(y, `at ${at}`).toBeNaN();
            else expect(Math.abs(y - expected), `at ${at}`).toBeLessThan(1e-9);
          });
        },
      ),
      { numRuns: 1500 },
    );
  });

  it("keeps a constant and hits rows exactly, whatever the curve", () => {
    const t = Array.from({ length: 200 }, (_, i) => i * 1000 + (i % 7) * 10);
    for (const curve of CURVES) {
      const flat = resample(
        curve,
        3000,
        t,
        t.map(() => 21.5),
      );
      for (const y of flat.values) if (!Number.isNaN(y)) expect(Math.abs(y - 21.5)).toBeLessThan(1e-13);
      if (curve === "cell-mean") continue;
      const some = resample(
        curve,
        3000,
        t,
        t.map((_, i) => Math.sin(i)),
      );
      for (let i = 0; i < 200; i += 7) expect(some.values[i - some.first]).toBe(Math.sin(i));
    }
  });

  it("band-limited brings back a sine between nearly even rows far better than a straight line", () => {
    const t = Array.from({ length: 400 }, (_, i) => i * 1000 + 300 + ((i * 7919) % 41) - 20);
    const f = 0.2;
    const sine = (time: number) => Math.sin((2 * Math.PI * f * time) / 1000);
    const error = (curve: Curve) => {
      const got = resample(curve, 3000, t, t.map(sine));
      let worst = 0;
      got.values.forEach((y, i) => {
        if (!Number.isNaN(y) && i > 40 && i < 360)
          worst = Math.max(worst, Math.abs(y - sine((got.first + i) * 1000)));
      });
      return worst;
    };
    expect(error("band-limited")).toBeLessThan(0.02);
    expect(error("local-cubic")).toBeLessThan(0.1);
    expect(error("band-limited")).toBeLessThan(error("local-cubic") / 3);
  });

  it("states the mean response that a sine between even rows shows", () => {
    const places = new Array(16).fill(1);
    for (const f of [0.02, 0.1, 0.3]) {
      // Straight line, closed form: mean over u of 1 - 2 u (1 - u)(1 - cos w) is 1 - (1 - cos w) / 3.
      const line = meanPowerGainOver(straightLineWeights, places, 0, f);
      expect(line).toBeCloseTo(1 - (1 - Math.cos(2 * Math.PI * f)) / 3, 2);
      const cubic = meanPowerGainOver(localCubicWeights, places, 0, f);
      const sinc = meanPowerGainOver(sincWeights(new SincKernel(16, 8)), places, 0, f);
      expect(Math.abs(1 - sinc)).toBeLessThan(1e-3);
      expect(Math.abs(1 - cubic)).toBeLessThan(Math.abs(1 - line));
    }
  });
});
