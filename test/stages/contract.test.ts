/** One contract for all stages: whatever is in the registry must keep it, at every rate and block size. */
import { describe, expect, it } from "vitest";
import { stageDesignAccount } from "../../src/report/stage-account.ts";
import { intervalSeconds } from "../../src/signal/grid.ts";
import { FILLED, MISSING, STATES } from "../../src/signal/marks.ts";
import { STAGES } from "../../src/stages/registry.ts";
import { planOf, run } from "../engine/harness.ts";
import {
  atWork,
  chainReach,
  cleanOf,
  gridShift,
  roughValues,
  rowsOnGrid,
  throughKernel,
} from "./parts/at-work.ts";
import { CASES, type StageCase } from "./parts/cases.ts";
import { gridEntry, RATES, type Rate } from "./parts/rates.ts";
import { expectStatedResponse } from "./parts/stated-response.ts";

/** Before 1970, and not a multiple of any factor: records of these tests cross the epoch. */
const FIRST = -403;
const N = 950;
/** A sample that every decimation of the table keeps; the next one is dropped by all. */
const KEPT = 180;
const SEGMENTS = "0.04 cycles/sample";

const everyCase = (test: (c: StageCase, rate: Rate) => void) => {
  for (const c of CASES) it(`${c.stage}: ${c.name}`, () => RATES.forEach((rate) => test(c, rate)));
};
const filtering = (test: (c: StageCase, rate: Rate) => void) => {
  for (const c of CASES)
    if (atWork(c, RATES[0]!).planned.design.taps !== null)
      it(`${c.stage}: ${c.name}`, () => RATES.forEach((rate) => test(c, rate)));
};

describe("the table", () => {
  it("holds every stage of the registry that works on a grid or makes one, and no other", () => {
    const names = [...STAGES.values()].filter((s) => s.worksOn !== "rows").map((s) => s.name);
    expect(new Set(CASES.map((c) => c.stage))).toEqual(new Set(names));
  });

  it("says how many samples each case's outputs rest on, as the design does", () => {
    for (const c of CASES) {
      const { design } = atWork(c, RATES[0]!).planned;
      expect(design.keepEvery).toBe(c.keeps ?? 1);
      if (design.taps !== null && c.window !== null) expect(design.taps.length).toBe(c.window);
      if (c.window !== null && c.stage !== "resample")
        expect(design.reach!.before + design.reach!.after + 1).toBe(c.window);
    }
  });
});

describe("the same bytes for any block size, with an account kept or without", () => {
  everyCase((c, rate) => {
    // Segments short enough to find room between the holes.
    const below = c.stage === "report" ? [] : [{ stage: "report", resolution: SEGMENTS }];
    const { plan } = atWork(c, rate, 1.5, below);
    const record = rowsOnGrid(plan, FIRST, roughValues(N));
    const facts = (blockRows: number) => {
      const { results, ...series } = run(plan, record, { blockRows });
      const [result] = results;
      return {
        ...series,
        grid: [result!.gridCounts.samples, result!.gridCounts.holds()],
        stages: result!.measures.map((m) => [
          m.counts.samples,
          m.counts.holds(),
          m.comparison?.sums.figures(),
          m.comparison?.removal.list(),
          m.cross?.rr,
          m.alias?.measure(),
        ]),
      };
    };
    const whole = facts(65_536);
    expect(whole.clean[0]!.some((v) => !Number.isNaN(v))).toBe(true);
    for (const blockRows of [1, 7, 1000]) expect(facts(blockRows)).toEqual(whole);
    expect(cleanOf(atWork(c, rate).plan, record)).toEqual({
      first: whole.first + 0,
      values: whole.clean[0],
      marks: whole.marks[0],
    });
  });
});

describe("a run after a gap gives what it gives alone", () => {
  everyCase((c, rate) => {
    const { plan, planned } = atWork(c, rate);
    const learnsWhole = planned.design.learn !== undefined && planned.design.reach === null;
    if (learnsWhole) return;
    // The second run starts on a span of detrend and on an index that no factor divides otherwise.
    const start = c.stage === "detrend" ? 90 : 91;
    const wave = (i: number) => 2 + Math.sin(i / 7) + 0.2 * Math.cos(i * 1.9);
    const both = Array.from({ length: N }, (_, i) => {
      const k = FIRST + i;
      return k >= -150 && k < start ? undefined : wave(k);
    });
    const alone = cleanOf(plan, rowsOnGrid(plan, start, both.slice(start - FIRST)));
    const after = cleanOf(plan, rowsOnGrid(plan, FIRST, both));
    const at = alone.first - after.first;
    expect(at).toBeGreaterThan(0);
    expect(after.values.slice(at)).toEqual(alone.values);
    expect(after.marks.slice(at)).toEqual(alone.marks);
    // Nothing stands in the gap, and a run before it ends as it ends alone.
    const before = cleanOf(plan, rowsOnGrid(plan, FIRST, both.slice(0, -150 - FIRST)));
    expect(after.first).toBe(before.first);
    expect(after.values.slice(0, before.values.length)).toEqual(before.values);
    for (let i = before.values.length; i < at; i++) expect(after.values[i]).toBeNaN();
  });
});

describe("an impulse lands where the design says", () => {
  everyCase((c, rate) => {
    const { planned } = atWork(c, rate);
    const { design } = planned;
    if (c.stage === "resample" || design.learn !== undefined) return;
    const at = 37;
    const x = new Float64Array(800);
    x[at - FIRST] = 1;
    const { first, y } = throughKernel(planned, FIRST, x);
    // Symmetric answers balance in energy, whatever they pass; one-sided ones by their low frequencies.
    const even = y.every((v, i) => {
      const mirror = 2 * (at + design.delay.samples - design.delay.indexSamples - first) - i;
      return Number.isNaN(v) || Math.abs(Math.abs(v) - Math.abs(y[Math.round(mirror)] || 0)) < 1e-15;
    });
    let weight = 0;
    let moment = 0;
    y.forEach((v, i) => {
      const w = Number.isNaN(v) ? 0 : even ? v * v : v;
      weight += w;
      moment += w * (first + i - at);
    });
    const interval = intervalSeconds(planned.signalIn.grid!);
    const late_s = (moment / weight + gridShift(planned)) * interval;
    const stated_s = design.delay.samples * interval - design.delay.compensated_s;
    expect(Math.abs(late_s - stated_s)).toBeLessThan(1e-9 * interval);
    const { delay } = stageDesignAccount(atWork(c, rate).plan, planned);
    expect(delay.residual_s).toBeCloseTo(stated_s, 12);
    expect(delay.introduced_s).toBeCloseTo(design.delay.samples * interval, 12);
    // Nothing before the reach, nothing after it.
    y.forEach((v, i) => {
      const k = first + i;
      const { before, after } = design.reach!;
      if (k < at - after || k > at + before) expect(v === 0 || Number.isNaN(v)).toBe(true);
    });
  });
});

describe("a sine wave comes out as the stated response says", () => {
  filtering((c, rate) => {
    const { plan, planned } = atWork(c, rate);
    expectStatedResponse(plan, planned, FIRST);
  });
});

describe("stages without a filter hand the samples on as they are", () => {
  everyCase((c, rate) => {
    const { planned } = atWork(c, rate);
    const { taps, learn, keepEvery } = planned.design;
    if (taps !== null || learn !== undefined || c.stage === "resample") return;
    const x = Float64Array.from({ length: 300 }, (_, i) => Math.cos(0.77 * i));
    expect(throughKernel(planned, FIRST, x)).toEqual({ first: FIRST, y: x });
    const kept = throughKernel(planned, FIRST, x, false);
    expect(kept.y).toEqual(x.filter((_, i) => (FIRST + i) % keepEvery === 0));
  });
});

describe("every sample is in one state, and none is lost on the way", () => {
  everyCase((c, rate) => {
    const { plan, planned, place } = atWork(c, rate);
    const { results, clean, marks, first } = run(plan, rowsOnGrid(plan, FIRST, roughValues(N)));
    const counts = place < 0 ? results[0]!.gridCounts : results[0]!.measures[place]!.counts;
    const states = counts.states();
    expect(Object.values(states).reduce((a, b) => a + b, 0)).toBe(counts.samples);
    expect(counts.samples).toBe(clean[0]!.length);
    expect(states.missing + states.screened).toBe(clean[0]!.filter(Number.isNaN).length);
    clean[0]!.forEach((v, i) => expect((marks[0]![i]! & MISSING) !== 0).toBe(Number.isNaN(v)));
    const input = place < 1 ? results[0]!.gridCounts : results[0]!.measures[place - 1]!.counts;
    const from = Math.ceil(FIRST / planned.design.keepEvery) + 0;
    const last = Math.floor((FIRST + N - 1 - (gridShift(planned) > 0 ? 1 : 0)) / planned.design.keepEvery);
    expect(input.samples).toBe(N);
    expect(first + 0).toBe(from);
    expect(counts.samples).toBe(last - from + 1);
    expect(STATES.reduce((sum, s) => sum + states[s], 0)).toBe(last - from + 1);
  });
});

describe("a constant stays that constant, or leaves what the design says", () => {
  everyCase((c, rate) => {
    const { plan, planned } = atWork(c, rate);
    const taps = planned.design.taps ?? Float64Array.of(1);
    const gain = c.constant === "same" ? 1 : c.constant === "nothing" ? 0 : taps.reduce((a, w) => a + w, 0);
    const doubt = c.constant === "as stated" ? 1e-15 * taps.reduce((a, w) => a + Math.abs(w), 0) : 1e-15;
    for (const constant of [1, 0.1, -273.15, 9.87654321e15, 3e-12]) {
      const x = Array.from({ length: 620 }, (_, i) => (i === 100 || i === 127 ? Number.NaN : constant));
      const { values } = cleanOf(plan, rowsOnGrid(plan, FIRST, x));
      const wrong = values.find((v) => Math.abs(v - gain * constant) > doubt * Math.abs(constant));
      expect(wrong).toBeUndefined();
      expect(values.some((v) => !Number.isNaN(v))).toBe(true);
    }
  });
});

describe("one missing sample touches no more outputs than its window is long", () => {
  everyCase((c, rate) => {
    const { plan, planned } = atWork(c, rate);
    const whole = Array.from({ length: 800 }, (_, i) => Math.sin(i / 11) + i / 100);
    const holed = whole.map((v, i) => (FIRST + i === KEPT ? Number.NaN : v));
    const [a, b] = [whole, holed].map((x) => cleanOf(plan, rowsOnGrid(plan, FIRST, x)));
    const keeps = planned.design.keepEvery;
    // A trend rests on all samples of its span: there, only what goes missing is counted.
    const learns = planned.design.learn !== undefined;
    const touched = a!.values.flatMap((v, i) => {
      const other = b!.values[i]!;
      const changed = Number.isNaN(v) !== Number.isNaN(other) || Math.abs(v - other) > 1e-13 * Math.abs(v);
      return (learns ? Number.isNaN(other) && !Number.isNaN(v) : changed) ? [a!.first + i] : [];
    });
    const { before, after } = learns ? { before: 0, after: 0 } : chainReach(c, plan);
    expect(b!.values.length).toBe(a!.values.length);
    for (const k of touched) {
      expect(k * keeps).toBeGreaterThanOrEqual(KEPT - after);
      expect(k * keeps).toBeLessThanOrEqual(KEPT + before);
    }
    expect(touched.length).toBeLessThanOrEqual(Math.ceil((before + after + 1) / keeps));
    expect(touched.length).toBeGreaterThan(0);
  });
});

describe("a bridged row marks exactly the outputs that rest on it", () => {
  everyCase((c, rate) => {
    const { plan, planned } = atWork(c, rate, 2.5);
    const keeps = planned.design.keepEvery;
    const { before, after } =
      planned.design.learn !== undefined ? { before: 0, after: 0 } : chainReach(c, plan);
    for (const at of [KEPT, KEPT + 1]) {
      const x = Array.from({ length: 800 }, (_, i) => (FIRST + i === at ? undefined : 3 + Math.sin(i / 11)));
      const { first, values, marks } = cleanOf(plan, rowsOnGrid(plan, FIRST, x));
      const wanted: number[] = [];
      for (let k = at - after; k <= at + before; k++) if (k % keeps === 0) wanted.push(k / keeps);
      const marked = marks.flatMap((m, i) => ((m & FILLED) !== 0 ? [first + i] : []));
      expect(marked).toEqual(wanted);
      for (const k of marked) expect(values[k - first]).not.toBeNaN();
    }
  });
});

describe("moving the record in time moves the result, and nothing else", () => {
  everyCase((c, rate) => {
    const { plan } = atWork(c, rate);
    const by = 2520 * 1000;
    const x = roughValues(N);
    const here = cleanOf(plan, rowsOnGrid(plan, FIRST, x));
    const there = cleanOf(plan, rowsOnGrid(plan, FIRST + by, x));
    expect(there.first - here.first).toBe(by / (atWork(c, rate).planned.design.keepEvery || 1));
    expect(there.marks).toEqual(here.marks);
    there.values.forEach((v, i) => {
      const wanted = here.values[i]!;
      expect(Number.isNaN(v)).toBe(Number.isNaN(wanted));
      if (!Number.isNaN(v)) expect(Math.abs(v - wanted)).toBeLessThan(1e-12 * 20);
    });
  });
});

describe("rows beyond the reach change no bit: a night is cleaned as the whole record is", () => {
  everyCase((c, rate) => {
    const { plan, planned } = atWork(c, rate);
    const { reach, keepEvery } = planned.design;
    if (reach === null) return;
    // Whole spans of detrend; any part of the record for the others.
    const [from, to] = c.stage === "detrend" ? [-90, 270] : [-91, 301];
    const { before, after } = c.stage === "resample" ? reach : chainReach(c, plan);
    const spans = c.stage === "detrend" ? { before: 0, after: 0 } : { before, after };
    const x = Array.from({ length: N }, (_, i) => Math.sin(i / 11) + (i % 7) / 10);
    const whole = cleanOf(plan, rowsOnGrid(plan, FIRST, x));
    const night = cleanOf(plan, rowsOnGrid(plan, from, x.slice(from - FIRST, to - FIRST)));
    let compared = 0;
    night.values.forEach((v, i) => {
      const k = night.first + i;
      if (k * keepEvery - spans.before < from || k * keepEvery + spans.after >= to) return;
      expect(v).toBe(whole.values[k - whole.first]);
      expect(night.marks[i]).toBe(whole.marks[k - whole.first]);
      compared++;
    });
    expect(compared).toBeGreaterThan(10);
  });
});

describe("a channel that is not selected passes untouched", () => {
  for (const c of CASES) {
    const stage = STAGES.get(c.stage)!;
    it(`${c.stage}: ${c.name}`, () => {
      const rate = RATES[0]!;
      const signal = planOf([gridEntry(rate, 1.5)], ["a", "b"]).gridStage.design.grid;
      const outcome = stage.design(
        stage.settings.parse(c.settings(rate)) as never,
        {
          grid: c.stage === "resample" ? null : signal,
          channels: [
            { name: "a", unit: "m" },
            { name: "b", unit: "m" },
          ],
          filters: [[], []],
          finest_s: 1,
        },
        [0],
      );
      if (outcome.design === null || outcome.problems.length > 0) {
        // Stages that change the grid of one channel would tear the series apart.
        expect(outcome.problems[0]!.path).toEqual(["channels"]);
        return;
      }
      expect("grid" in outcome.design && outcome.design.grid).toBe(signal);
      const plan = planOf(
        [gridEntry(rate, 1.5), { stage: c.stage, ...c.settings(rate), channels: ["a"] }],
        ["a", "b"],
      );
      const rough = rowsOnGrid(plan, FIRST, roughValues(400));
      const { clean, marks } = run(plan, {
        times: rough.times,
        columns: [rough.columns[0]!, rough.columns[0]!],
      });
      const grid = run(planOf([gridEntry(rate, 1.5)]), rough);
      expect(clean[1]).toEqual(grid.clean[0]);
      expect(marks[1]).toEqual(grid.marks[0]);
    });
  }
});
