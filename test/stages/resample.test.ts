import { describe, expect, it } from "vitest";
import { intervalSeconds, timeOf, timeSince } from "../../src/signal/grid.ts";
import { END, FILLED, MISSING } from "../../src/signal/marks.ts";
import { ROW_METHODS } from "../../src/stages/parts/row-methods.ts";
import { type Entry, planOf, run } from "../engine/harness.ts";
import reference from "../reference/17-interpolation.json" with { type: "json" };
import { gridEntry, interval_us, RATES } from "./parts/rates.ts";
import { largest } from "./parts/small.ts";

const resample = (settings: Record<string, unknown>): Entry => ({ stage: "resample", ...settings });

/** Times in microseconds to the clean series, by time in microseconds. */
function put(settings: Record<string, unknown>, times: readonly number[], values: readonly number[]) {
  const plan = planOf([resample(settings)]);
  const { clean, marks, first, results } = run(plan, { times, columns: [values] });
  const at = new Map(clean[0]!.map((v, i) => [timeOf(plan.outGrid, first + i), v]));
  const markAt = new Map(marks[0]!.map((m, i) => [timeOf(plan.outGrid, first + i), m]));
  return { plan, at, markAt, y: clean[0]!, marks: marks[0]!, first, effect: results[0]!.interpolation };
}

describe("against reference 17", () => {
  const kinds = [
    ["straight-line", "linear"],
    ["nearest-sample", "nearestTiesToEarlier"],
    ["monotone-cubic", "pchip"],
  ] as const;

  for (const { id, inputs, expected } of reference.cases.filter((c) => c.inputs.t !== undefined))
    it.each(kinds)(`${id}: %s`, (between, key) => {
      // All times of the reference are multiples of 50 ms.
      const times = inputs.t!.map((t) => Math.round(t * 1e6));
      const { at } = put({ interval: "50 ms", between, "longest-gap": "20 s" }, times, inputs.y!);
      inputs.query!.forEach((q, i) => {
        const wanted = (expected[key] as number[])[i]!;
        expect(Math.abs(at.get(Math.round(q * 1e6))! - wanted)).toBeLessThanOrEqual(
          1e-11 * largest(inputs.y!),
        );
      });
    });

  it("gap: rows farther apart than the longest gap are not joined", () => {
    const { inputs, expected } = reference.cases.find((c) => c.id === "gap")!;
    const times = inputs.t!.map((t) => t * 1e6);
    for (const between of ROW_METHODS) {
      const { at, markAt } = put({ interval: "500 ms", between, "longest-gap": "2 s" }, times, inputs.y!);
      for (const q of [3, 6, 9]) {
        expect(at.get(q * 1e6)).toBeNaN();
        expect(markAt.get(q * 1e6)! & MISSING).toBe(MISSING);
      }
    }
    const { at } = put({ interval: "500 ms", "longest-gap": "2 s" }, times, inputs.y!);
    expect(at.get(1.5e6)).toBe(expected.linear![0]);
    expect(at.get(10.5e6)).toBe(expected.linear![4]);
  });
});

describe("the longest gap", () => {
  it("is bridged when exactly met, and not when a microsecond longer", () => {
    for (const [last, there] of [
      [5_000_000, true],
      [5_000_001, false],
    ] as const) {
      const { at, markAt } = put({ interval: "1 s", "longest-gap": "4 s" }, [0, 1_000_000, last], [0, 1, 5]);
      expect(Number.isNaN(at.get(3_000_000))).toBe(!there);
      expect(markAt.get(3_000_000)! & FILLED).toBe(there ? FILLED : 0);
    }
  });

  it("is two intervals when nothing is said, so one lost row is bridged and flagged", () => {
    const { at, markAt, plan } = put({ interval: "10 ms" }, [0, 10_000, 30_000, 60_000], [0, 1, 3, 6]);
    expect(at.get(20_000)).toBe(2);
    expect(markAt.get(20_000)).toBe(FILLED);
    expect(at.get(40_000)).toBeNaN();
    expect(plan.gridStage.design.settings["longest-gap_s"]).toBe(0.02);
  });

  it("is measured between rows that hold a value: an empty cell does not shorten it", () => {
    const { at } = put({ interval: "1 s" }, [0, 1e6, 2e6, 3e6, 4e6], [0, 1, Number.NaN, Number.NaN, 4]);
    expect(at.get(2e6)).toBeNaN();
    expect(at.get(3e6)).toBeNaN();
    expect(at.get(4e6)).toBe(4);
  });
});

describe("marks", () => {
  it("measured up to 1.5 intervals between the two rows, filled beyond", () => {
    for (const [gap, mark] of [
      [1_500_000, 0],
      [1_500_001, FILLED],
    ] as const) {
      const start = 400_000;
      const { markAt } = put({ interval: "1 s", "longest-gap": "10 s" }, [start, start + gap], [1, 2]);
      expect(markAt.get(1_000_000)).toBe(mark);
    }
  });

  it("a row on a grid time is measured, whatever lies around it", () => {
    const { markAt, y } = put({ interval: "1 s", "longest-gap": "60 s" }, [0, 30e6, 60e6], [0, 30, 60]);
    expect([0, 30e6, 60e6].map((t) => markAt.get(t))).toEqual([0, 0, 0]);
    expect(markAt.get(29e6)).toBe(FILLED);
    expect(y).toEqual(Array.from({ length: 61 }, (_, i) => i));
  });

  it("cells at the ends of a run are blank, and say that the end is why", () => {
    const times = Array.from({ length: 21 }, (_, i) => i * 250_000);
    const { at, markAt } = put(
      { interval: "1 s", between: "cell-mean" },
      times,
      times.map((t) => t / 1e6),
    );
    expect(markAt.get(0)).toBe(MISSING | END);
    expect(markAt.get(5_000_000)).toBe(MISSING | END);
    for (const t of [1, 2, 3, 4]) expect(at.get(t * 1e6)).toBeCloseTo(t, 12);
  });
});

/** What a method may move a straight line, in intervals; stamps are whole microseconds. */
const OFF: Readonly<Record<string, number>> = {
  "straight-line": 1e-9,
  "monotone-cubic": 1e-9,
  "local-cubic": 1e-9,
  "cell-mean": 1e-9,
  "nearest-sample": 1 / 3 + 2e-4,
  // A sinc of 16 rows a side passes a slope to some 2e-4 of a step.
  "band-limited": 3e-4,
};

describe("the grid", () => {
  it("falls on whole intervals since the epoch, before it too", () => {
    const times = Array.from({ length: 12 }, (_, i) => -5_300_000 + i * 1_000_000);
    const { at, first } = put(
      { interval: "1 s" },
      times,
      times.map((t) => t / 1e6),
    );
    expect(first).toBe(-5);
    expect([...at.keys()].map((t) => t + 0)).toEqual(
      [-5, -4, -3, -2, -1, 0, 1, 2, 3, 4, 5].map((s) => s * 1e6),
    );
    for (const [t, v] of at) expect(Math.abs(v - t / 1e6)).toBeLessThan(1e-14 * 8);
  });

  it("falls on the anchor when there is one, earlier and later", () => {
    const times = Array.from({ length: 40 }, (_, i) => i * 1_000_000);
    const line = times.map((t) => t / 1e6);
    const { at } = put(
      { interval: "10 s", anchor: "1970-01-01T00:00:13.5Z", "longest-gap": "10 s" },
      times,
      line,
    );
    expect([...at]).toEqual([
      [3.5e6, 3.5],
      [13.5e6, 13.5],
      [23.5e6, 23.5],
      [33.5e6, 33.5],
    ]);
  });

  it("of 1/360 s is held exactly: 360 samples are a second, a century on", () => {
    const plan = planOf([resample({ rate: "360 Hz" })]);
    const grid = plan.outGrid;
    expect(timeSince(grid, 360, 0)).toBe(1e6);
    expect(timeOf(grid, 360 * 86_400 * 36_525)).toBe(36_525 * 86_400e6);
    expect(timeOf(grid, -360 * 3600 - 1)).toBe(-3_600_002_778);
    expect(intervalSeconds(grid)).toBeCloseTo(1 / 360, 17);
  });

  it("and times are not shifted: a straight line stays where it is by every method, at every rate", () => {
    for (const rate of RATES)
      for (const between of ROW_METHODS) {
        const step = interval_us(rate);
        // Rows a third of an interval past the grid times, from before 1970 on.
        const times = Array.from({ length: 150 }, (_, i) => Math.round((i - 70 + 1 / 3) * step));
        const plan = planOf([gridEntry(rate, 2, { between })]);
        const { clean, first } = run(plan, { times, columns: [times] });
        const inner = clean[0]!.slice(25, -25);
        inner.forEach((v, i) => {
          const t = timeSince(plan.outGrid, first + 25 + i, 0);
          const off = OFF[between]! * step;
          expect(Math.abs(v - t)).toBeLessThanOrEqual(off + 1e-6);
        });
      }
  });
});

describe("bits", () => {
  it("do not depend on how far back the rows were read, by any method and at any rate", () => {
    for (const rate of RATES)
      for (const between of ROW_METHODS) {
        const step = interval_us(rate);
        const times = Array.from({ length: 400 }, (_, i) =>
          Math.round((i + 0.37 + 0.2 * Math.sin(i * 1.7)) * step + 1_700_000_000_000_000),
        );
        const values = times.map((_, i) => Math.sin(i / 3) + i / 50);
        const plan = planOf([gridEntry(rate, 2, { between })]);
        const of = (from: number, to: number) =>
          run(plan, { times: times.slice(from, to), columns: [values.slice(from, to)] });
        const [whole, part] = [of(0, 400), of(113, 333)];
        const { before, after } = plan.gridStage.design.reach!;
        const at = part.first - whole.first;
        const inside = part.clean[0]!.slice(before, -after);
        expect(inside.length).toBeGreaterThan(100);
        expect(inside).toEqual(whole.clean[0]!.slice(at + before, at + part.clean[0]!.length - after));
      }
  });
});

describe("the stated effect on the spectrum is the measured one", () => {
  // Rows on times that all lie at the same place between two grid times.
  const u = 0.53125;
  const measured = (between: string, f: number) => {
    const times = Array.from({ length: 6000 }, (_, i) => Math.round((i + 1 - u) * 1e6));
    const { y, plan, effect } = put(
      { interval: "1 s", between, "longest-gap": "2 s" },
      times,
      times.map((t) => Math.sin(2 * Math.PI * f * (t / 1e6) + 0.4)),
    );
    const inner = y.filter((v) => !Number.isNaN(v)).slice(40, -40);
    const power = inner.reduce((sum, v) => sum + v * v, 0) / inner.length;
    const { meanPowerGain } = plan.gridStage.design.interpolation;
    return { power: 2 * power, stated: meanPowerGain!(effect, f, 1) };
  };

  it.each(["straight-line", "local-cubic", "band-limited"])("%s", (between) => {
    for (const f of [0.0531, 0.1507, 0.2511, 0.3507, 0.4509]) {
      const { power, stated } = measured(between, f);
      // A sine over thousands of samples holds its power to about one sample in all.
      expect(Math.abs(power - stated!)).toBeLessThan(1e-3);
      expect(power).toBeLessThan(1.001);
    }
  });

  it("cell mean, over many rows a cell: that of an average over the interval", () => {
    for (const f of [0.05, 0.2, 0.45]) {
      const times = Array.from({ length: 60_000 }, (_, i) => i * 50_000);
      const { y, plan, effect } = put(
        { interval: "1 s", between: "cell-mean", "accept-aliasing": true },
        times,
        times.map((t) => Math.sin(2 * Math.PI * f * (t / 1e6) + 0.4)),
      );
      const inner = y.slice(5, -5);
      const power = (2 * inner.reduce((sum, v) => sum + v * v, 0)) / inner.length;
      const stated = plan.gridStage.design.interpolation.meanPowerGain!(effect, f, 0.05);
      // The trapezium between rows costs a little more: (pi f dt)^2 / 3 of the power at most.
      expect(Math.abs(power / stated! - 1)).toBeLessThan(0.006);
    }
  });

  it("nearest sample says how far the rows were moved", () => {
    const times = Array.from({ length: 1000 }, (_, i) => i * 1_000_000 + ((i * 7919) % 301) * 1000 - 150_000);
    const { effect } = put({ interval: "1 s", between: "nearest-sample" }, times, times);
    expect(effect["displaced_max_s"]).toBe(0.15);
    // Spread evenly over 301 ms.
    expect(effect["displaced_rms_s"] as number).toBeCloseTo(0.301 / Math.sqrt(12), 3);
  });
});
