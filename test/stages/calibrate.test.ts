import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { MISSING, SCREENED } from "../../src/signal/marks.ts";
import { codesOf, designOf, everySecond, rejectedAt, through } from "./row-stages.ts";

const NONE = Number.NaN;

describe("polynomial", () => {
  it("is evaluated at every value, and the offset added", () => {
    const out = through("calibrate", { polynomial: [1, 2, 3], offset: 0.5 }, everySecond([0, 1, -2, NONE]));
    expect(out.columns[0]).toEqual([1.5, 6.5, 9.5, NONE]);
    expect(out.marks[0]).toEqual([0, 0, 0, MISSING]);
    expect(out.effects[0]!.notes).toEqual({
      rows_calibrated: 3,
      rows_changed: 3,
      range_before: [-2, 1],
      range_after: [1.5, 9.5],
    });
  });

  it("never hands on what is no number", () => {
    const out = through("calibrate", { polynomial: [0, 0, 1e300] }, everySecond([1, 1e300]));
    expect(rejectedAt(out)).toEqual([1]);
    expect(out.effects[0]!.rejected).toEqual({ "sensor-range": 0, "outside-table": 0, "not-finite": 1 });
  });
});

describe("table", () => {
  const table = [
    [0, 10],
    [10, 20],
    [20, 0],
  ];
  it("joins its points by straight lines, and rejects what lies outside, never extrapolating", () => {
    const out = through("calibrate", { table }, everySecond([0, 5, 10, 15, 20, 20.001, -1e-9]));
    expect(out.columns[0]).toEqual([10, 15, 20, 10, 0, NONE, NONE]);
    expect(rejectedAt(out)).toEqual([5, 6]);
    expect(out.effects[0]).toMatchObject({
      rejected: { "outside-table": 2 },
      firstRejected: [
        { time_us: 5e6, value: 20.001, reason: "outside-table" },
        { time_us: 6e6, value: -1e-9, reason: "outside-table" },
      ],
    });
  });

  it("gives its points back exactly, and stays between them", () => {
    const points = fc
      .uniqueArray(fc.double({ min: -1e3, max: 1e3, noNaN: true }), { minLength: 2, maxLength: 9 })
      .map((raw) => raw.sort((a, b) => a - b))
      .filter((raw) => raw.every((x, i) => i === 0 || x > raw[i - 1]!));
    fc.assert(
      fc.property(points, fc.double({ min: 0, max: 1, noNaN: true }), (raw, u) => {
        const made = raw.map((x, i) => [x, (i * 37) % 11]);
        const out = through("calibrate", { table: made }, everySecond(raw)).columns[0]!;
        expect(out).toEqual(made.map(([, y]) => y));
        const x = raw[0]! + u * (raw[1]! - raw[0]!);
        const [y] = through("calibrate", { table: made }, everySecond([x])).columns[0]!;
        expect(y).toBeGreaterThanOrEqual(-1e-9);
        expect(y).toBeLessThanOrEqual(11 + 1e-9);
      }),
    );
  });
});

describe("sensor range", () => {
  it("is judged on the raw value, with a reason of its own", () => {
    const settings = { polynomial: [0, 0.1], "sensor-range": [4, 20] };
    const out = through("calibrate", settings, everySecond([4, 3.99, 20, 20.01]));
    expect(out.marks[0]).toEqual([0, SCREENED, 0, SCREENED]);
    expect(out.effects[0]!.rejected["sensor-range"]).toBe(2);
  });
});

describe("times and channels", () => {
  it("takes rows from `from` to before `until` only, and selected channels only", () => {
    const settings = { offset: 1, from: "1970-01-01T00:00:01Z", until: "1970-01-01T00:00:03Z" };
    const out = through("calibrate", settings, everySecond([0, 0, 0, 0], [0, 0, 0, 0]), { selected: [1] });
    expect(out.columns).toEqual([
      [0, 0, 0, 0],
      [0, 1, 1, 0],
    ]);
    expect(out.effects[1]!.notes).toMatchObject({ rows_calibrated: 2, rows_changed: 2 });
  });

  it("does not depend on the block, nor write into the rows it is given", () => {
    const rows = everySecond(Array.from({ length: 50 }, (_, i) => (i % 9 === 4 ? NONE : i * 1.7)));
    const settings = { polynomial: [0.1, 2, -0.01], "sensor-range": [0, 60] };
    const whole = through("calibrate", settings, rows, { blockRows: 65_536 });
    expect(whole.times).toEqual(rows.times);
    for (const blockRows of [1, 7, 1000])
      expect(through("calibrate", settings, rows, { blockRows })).toEqual(whole);
  });
});

describe("unit", () => {
  const unitsOf = (settings: Record<string, unknown>) => designOf("calibrate", settings).design!.channels[0]!;
  it("goes on to the signal when all times are calibrated", () => {
    expect(unitsOf({ polynomial: [0, 1], unit: "ft" })).toEqual({ name: "a", unit: "ft" });
    expect(unitsOf({ offset: 1, until: "2031-01-01" })).toEqual({ name: "a", unit: "m" });
    expect(unitsOf({ polynomial: [0, 1], unit: "ft", until: "1970-01-02" })).toMatchObject({
      unit: "m",
      converting: { unit: "ft", spans: [{ until_us: 86_400e6 }] },
    });
  });
});

describe("mistakes", () => {
  const table = [
    [0, 1],
    [0, 2],
  ];
  const wrong: [string, string, Record<string, unknown>][] = [
    [
      "two ways",
      "calibrate-twice",
      {
        polynomial: [1],
        table: [
          [0, 1],
          [1, 2],
        ],
      },
    ],
    ["no way", "calibrate-nothing", { unit: "m" }],
    ["a table out of order", "table-order", { table }],
    ["an empty sensor range", "empty-range", { offset: 1, "sensor-range": [5, 5] }],
    ["an empty stretch", "empty-stretch", { offset: 1, from: "2031-01-01", until: "2031-01-01" }],
  ];
  it.each(wrong)("%s: %s", (_, code, settings) => expect(codesOf("calibrate", settings)).toEqual([code]));
});
