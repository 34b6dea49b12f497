/** Row stages in a whole chain: what their marks become on the grid, which order is refused, units, the account. */
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { DiagnosticError } from "../../src/diagnostics.ts";
import { FILLED, MISSING, SCREENED, SUSPECT } from "../../src/signal/marks.ts";
import { type Entry, evenRows, planOf, run } from "./harness.ts";

const METHODS = [
  "straight-line",
  "nearest-sample",
  "monotone-cubic",
  "local-cubic",
  "band-limited",
  "cell-mean",
];
const RESAMPLE: Entry = { stage: "resample", interval: "1 s", "longest-gap": "3 s" };
const RANGE: Entry = { stage: "screen", range: [-100, 100], channels: ["x"] };

const codes = (chain: Entry[], channels?: string[]): string[] => {
  try {
    planOf(chain, channels);
    return [];
  } catch (error) {
    if (!(error instanceof DiagnosticError)) throw error;
    return error.diagnostics.map((d) => d.code);
  }
};

describe("rejected values", () => {
  it("are bridged like lost rows, and a stretch too long to bridge is screened, not missing", () => {
    const x = Array.from({ length: 30 }, (_, i) => i);
    x[5] = 900;
    for (let i = 12; i < 18; i++) x[i] = 900;
    const { clean, marks } = run(planOf([RANGE, RESAMPLE]), evenRows(x, 1e6));
    expect(clean[0]![5]).toBe(5);
    expect(marks[0]![5]).toBe(FILLED);
    expect(marks[0]!.flatMap((m, i) => (m === SCREENED ? [i] : []))).toEqual([12, 13, 14, 15, 16, 17]);
    expect(marks[0]!.filter((m) => (m & MISSING) !== 0)).toEqual([]);
  });

  it("leave missing what was never written", () => {
    const x = Array.from({ length: 30 }, (_, i) => (i > 11 && i < 24 ? Number.NaN : i));
    x[12] = 900;
    const { marks } = run(planOf([RANGE, RESAMPLE]), evenRows(x, 1e6));
    const states = marks[0]!.slice(11, 25);
    expect(states).toEqual([0, SCREENED, ...new Array(11).fill(MISSING), 0]);
  });

  it("at the start and the end of the record are screened", () => {
    const { marks, first } = run(planOf([RANGE, RESAMPLE]), evenRows([900, 900, 1, 2, 3, 900, 900], 1e6));
    expect(first).toBe(0);
    expect(marks[0]).toEqual([SCREENED, SCREENED, 0, 0, 0, SCREENED, SCREENED]);
  });

  it("for every method give what lost rows give, and the blank times that they alone explain are screened", () => {
    const rows = fc.array(
      fc.tuple(fc.integer({ min: 1, max: 2500 }), fc.double({ min: -9, max: 9, noNaN: true }), fc.nat(5)),
      {
        minLength: 2,
        maxLength: 60,
      },
    );
    fc.assert(
      fc.property(rows, fc.constantFrom(...METHODS), (steps, between) => {
        let t = 0;
        const times = steps.map(([step]) => (t += step * 1000));
        const kept = steps.map(([, v]) => v);
        const kind = steps.map(([, , k]) => (k === 0 ? "missing" : k < 3 ? "rejected" : "kept"));
        const column = (rejected: number, missing = Number.NaN) =>
          kept.map((v, i) => (kind[i] === "kept" ? v : kind[i] === "rejected" ? rejected : missing));
        const grid = { ...RESAMPLE, between };
        const screened = run(planOf([RANGE, grid]), { times, columns: [column(900)] });
        const lost = run(planOf([grid]), { times, columns: [column(Number.NaN)] });
        const whole = run(planOf([grid]), { times, columns: [column(1)] });
        expect(screened.first).toEqual(lost.first);
        expect(screened.clean).toEqual(lost.clean);
        screened.marks[0]!.forEach((mark, i) => {
          const before = lost.marks[0]![i]!;
          if ((mark & SCREENED) === 0) expect(mark).toBe(before);
          else expect(mark).toBe((before & ~MISSING) | SCREENED);
          const wouldBe = whole.clean[0]![screened.first + i - whole.first];
          const plain =
            between === "straight-line" || between === "nearest-sample" || between.endsWith("-cubic");
          if (plain && Number.isNaN(screened.clean[0]![i]!))
            expect((mark & SCREENED) !== 0, `${between} ${i}`).toBe(!Number.isNaN(wouldBe!));
        });
        for (const blockRows of [1, 7, 1000]) {
          const cut = run(planOf([RANGE, grid]), { times, columns: [column(900)] }, { blockRows });
          expect(cut.clean).toEqual(screened.clean);
          expect(cut.marks).toEqual(screened.marks);
        }
      }),
      { numRuns: 400 },
    );
  });
});

describe("suspect rows", () => {
  const chain = (between: string): Entry[] => [
    { stage: "screen", agree: { with: "y", within: 0.5 } },
    { ...RESAMPLE, between },
  ];
  it("make suspect the samples that change with them, and no sample that does not", () => {
    const rows = fc.array(fc.tuple(fc.integer({ min: 200, max: 2500 }), fc.integer({ min: -9, max: 9 })), {
      minLength: 3,
      maxLength: 50,
    });
    fc.assert(
      fc.property(rows, fc.nat(49), fc.constantFrom(...METHODS), (steps, pick, between) => {
        let t = 0;
        const times = steps.map(([step]) => (t += step * 1000));
        const x = steps.map(([, v]) => v);
        const at = pick % x.length;
        const y = x.map((v, i) => (i === at ? v + 1 : v));
        const { clean, marks } = run(planOf(chain(between), ["x", "y"]), { times, columns: [x, y] });
        clean[0]!.forEach((v, i) => {
          const changed = !Number.isNaN(v) && v !== clean[1]![i]!;
          if (changed) expect(marks[0]![i]! & SUSPECT, `${between} ${i}`).toBe(SUSPECT);
          if (between === "straight-line" || between === "nearest-sample")
            expect((marks[0]![i]! & SUSPECT) !== 0).toBe(changed);
        });
      }),
      { numRuns: 400 },
    );
  });
});

describe("order and units", () => {
  const MEAN: Entry = { stage: "moving-average", points: 5 };
  it("row stages stand before resample only", () => {
    expect(codes([RESAMPLE, RANGE])).toEqual(["after-grid"]);
    expect(codes([RESAMPLE, MEAN, RANGE])).toEqual(["after-grid"]);
    expect(codes([RESAMPLE, { stage: "calibrate", offset: 1 }])).toEqual(["after-grid"]);
    expect(codes([RANGE, MEAN, RESAMPLE])).toEqual(["before-grid"]);
    expect(codes([RANGE])).toEqual(["no-grid"]);
    expect(codes([RANGE, RANGE, RESAMPLE])).toEqual([]);
  });

  const ft = { stage: "calibrate", polynomial: [0, 0.3048], unit: "ft" };
  it("a unit by calibration goes on to every later stage", () => {
    expect(planOf([ft, RESAMPLE, MEAN]).channels[0]!.unit).toBe("ft");
    expect(codes([ft, { stage: "screen", "rate-of-change": "1 m/s" }, RESAMPLE])).toEqual(["rate-unit"]);
    expect(codes([ft, { stage: "screen", "rate-of-change": "1 ft/s" }, RESAMPLE])).toEqual([]);
  });

  it("a channel calibrated for part of the time has no unit yet, and none twice", () => {
    const first = { ...ft, until: "1970-01-02" };
    const rest = { ...ft, from: "1970-01-02", polynomial: [1, 0.3048] };
    expect(codes([first, RESAMPLE])).toEqual(["half-calibrated"]);
    expect(codes([first, { ...rest, from: "1970-01-03" }, RESAMPLE])).toEqual(["half-calibrated"]);
    expect(codes([first, { ...rest, from: "1970-01-01" }, RESAMPLE])).toEqual(["calibrate-again"]);
    expect(codes([first, { ...rest, unit: "in" }, RESAMPLE])).toEqual(["calibrate-again"]);
    expect(planOf([rest, first, RESAMPLE]).channels[0]!.unit).toBe("ft");
  });
});

describe("with stages that learn, and what is removed", () => {
  it("gives the same bits for any block size", () => {
    const plan = planOf([
      { stage: "calibrate", polynomial: [0, 2], "sensor-range": [-50, 50] },
      { stage: "screen", spike: { over: "21 s" }, stuck: { over: "8 s" }, "rate-of-change": "40 m/s" },
      RESAMPLE,
      { stage: "detrend", degree: 1 },
      { stage: "moving-average", points: 5 },
      { stage: "report" },
    ]);
    const x = Float64Array.from({ length: 1500 }, (_, i) =>
      i % 301 === 150 ? 10 : i % 411 < 12 ? 3 : i % 97 === 0 ? Number.NaN : Math.sin(i / 9) + 0.001 * i,
    );
    const whole = run(plan, evenRows(x, 1e6), { blockRows: 65_536, removed: true });
    const facts = (r: typeof whole) =>
      r.results.map((c) => c.rowMeasures.map((m) => [m.counts.states(), m.counts.holds(), m.effect]));
    expect(whole.results[0]!.rowMeasures[1]!.effect.rejected).toMatchObject({ spike: 5, stuck: 48 });
    for (const blockRows of [1, 7, 1000]) {
      const cut = run(plan, evenRows(x, 1e6), { blockRows, removed: true });
      expect(cut.clean).toEqual(whole.clean);
      expect(cut.marks).toEqual(whole.marks);
      expect(cut.removed).toEqual(whole.removed);
      expect(facts(cut)).toEqual(facts(whole));
    }
  });
});
