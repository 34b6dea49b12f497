/** The contract of the stages that work on rows: whatever of them is in the registry must keep it. */
import { describe, expect, it } from "vitest";
import type { MarkedRows } from "../../src/signal/marked-rows.ts";
import { MISSING, SCREENED, SUSPECT } from "../../src/signal/marks.ts";
import { STAGES } from "../../src/stages/registry.ts";
import { designOf, type RowsIn, rejectedAt, through } from "./row-stages.ts";

interface RowCase {
  readonly stage: string;
  readonly name: string;
  readonly settings: Record<string, unknown>;
  /** Bound to certain times, so that moving the record changes the result. */
  readonly dated?: true;
}

const screen = (name: string, settings: Record<string, unknown>): RowCase => ({
  stage: "screen",
  name,
  settings,
});
const calibrate = (name: string, settings: Record<string, unknown>): RowCase => ({
  stage: "calibrate",
  name,
  settings,
});

const CASES: readonly RowCase[] = [
  screen("range", { range: [-3, 9] }),
  screen("rate of change", { "rate-of-change": "2 m/s" }),
  screen("spike", { spike: { over: "11 s", deviations: 4 } }),
  screen("stuck", { stuck: { over: "6 s", within: 0.01 } }),
  screen("agreement", { agree: { with: "b", within: 0.5 } }),
  screen("all tests", {
    range: [-3, 9],
    "rate-of-change": "4 m/s",
    spike: { over: "11 s", deviations: 4 },
    stuck: { over: "6 s", within: 0.01 },
    agree: { with: "b", within: 0.5 },
  }),
  {
    ...screen("for some of the time", {
      range: [-3, 2],
      from: "1969-12-31T23:58:20Z",
      until: "1970-01-01T00:01:00Z",
    }),
    dated: true,
  },
  calibrate("polynomial", { polynomial: [0.5, 2, -0.1], unit: "ft" }),
  calibrate("table", {
    table: [
      [-3, 0],
      [1, 10],
      [9, 12],
    ],
  }),
  calibrate("offset, inside the sensor's range", { offset: -0.25, "sensor-range": [-2, 6] }),
  {
    ...calibrate("for some of the time", { offset: 1, from: "1970-01-01T00:00:30Z" }),
    dated: true,
  },
];

/** Uneven rows from before 1970 on, with spikes, a stuck stretch, holes and a long gap; channel b follows a. */
function rows(n: number, from_us = -150_000_000): RowsIn {
  const times: number[] = [];
  const a: number[] = [];
  const b: number[] = [];
  let t = from_us;
  for (let i = 0; i < n; i++) {
    t += 700_000 + ((i * 7919) % 601) * 1000 + (i === 200 ? 400_000_000 : 0);
    const wave = 3 + 3 * Math.sin(i / 12) + 0.1 * Math.sin(i * 2.7);
    const still = i >= 90 && i < 110 ? 4.4 : wave;
    times.push(t);
    a.push(i % 41 === 7 ? 30 - i / 20 : i % 29 === 3 ? Number.NaN : still);
    b.push(i % 37 === 5 ? Number.NaN : still + (i % 53 === 11 ? 2 : 0));
  }
  return { times, columns: [a, b] };
}

const RECORD = rows(420);
const cut = ({ times, columns }: RowsIn, from: number, to: number): RowsIn => ({
  times: times.slice(from, to),
  columns: columns.map((c) => c.slice(from, to)),
});
const everyCase = (test: (c: RowCase) => void) => {
  for (const c of CASES) it(`${c.stage}: ${c.name}`, () => test(c));
};

describe("the table of row stages", () => {
  it("holds every stage of the registry that works on rows, and no other", () => {
    const names = [...STAGES.values()].filter((s) => s.worksOn === "rows").map((s) => s.name);
    expect(new Set(CASES.map((c) => c.stage))).toEqual(new Set(names));
  });
});

describe("the same rows for any block size", () => {
  everyCase((c) => {
    const whole = through(c.stage, c.settings, RECORD, { blockRows: 65_536 });
    for (const blockRows of [1, 7, 1000])
      expect(through(c.stage, c.settings, RECORD, { blockRows })).toEqual(whole);
  });
});

describe("every row comes out, in its place, in one state, and does something to some of them", () => {
  everyCase((c) => {
    const { times, columns, marks, effects } = through(c.stage, c.settings, RECORD);
    expect(times).toEqual(RECORD.times);
    let changed = 0;
    for (const [i, column] of columns.entries()) {
      expect(column.length).toBe(times.length);
      column.forEach((v, k) => {
        const mark = marks[i]![k]!;
        const raw = RECORD.columns[i]![k]!;
        expect((mark & (MISSING | SCREENED)) !== 0).toBe(Number.isNaN(v));
        // What was never written stays missing; only what was written can be kept out.
        expect((mark & MISSING) !== 0).toBe(Number.isNaN(raw));
        if (!Object.is(raw, v) || (mark !== 0 && mark !== MISSING)) changed++;
      });
      const counted = Object.values(effects[i]!.rejected).reduce((sum, n) => sum + n, 0);
      expect(marks[i]!.filter((m) => (m & SCREENED) !== 0).length).toBe(counted);
      expect(effects[i]!.firstRejected.length).toBe(Math.min(20, counted));
      for (const { time_us, value } of effects[i]!.firstRejected)
        expect(RECORD.columns[i]![times.indexOf(time_us)]).toBe(value);
    }
    expect(changed).toBeGreaterThan(0);
  });
});

describe("what is given is not written to", () => {
  everyCase((c) => {
    const kernel = designOf(c.stage, c.settings, ["m", "m"]).design!.rowStage();
    const block: MarkedRows = {
      count: RECORD.times.length,
      times: Float64Array.from(RECORD.times),
      columns: RECORD.columns.map((column) => Float64Array.from(column)),
      marks: RECORD.columns.map((column) => Uint8Array.from(column, (v) => (Number.isNaN(v) ? MISSING : 0))),
    };
    const before = structuredClone(block);
    let count = 0;
    const emit = (out: MarkedRows) => (count += out.count);
    kernel.push(block, emit);
    kernel.flush(emit);
    expect(block).toEqual(before);
    expect(count).toBe(block.count);
  });
});

describe("a channel that is not selected passes untouched", () => {
  everyCase((c) => {
    const { columns, marks, effects } = through(c.stage, c.settings, RECORD, { selected: [0] });
    expect(columns[1]).toEqual(RECORD.columns[1]);
    expect(rejectedAt({ times: [], columns, marks, effects }, 1)).toEqual([]);
    const both = through(c.stage, c.settings, RECORD);
    expect(columns[0]).toEqual(both.columns[0]);
    // Agreement alone looks at the other channel, as that one's own tests leave it.
    const own = (list: readonly number[]) => list.map((m) => m & ~SUSPECT);
    expect(own(marks[0]!)).toEqual(own(both.marks[0]!));
  });
});

describe("rows beyond the stated reach change nothing", () => {
  everyCase((c) => {
    const { before, after } = designOf(c.stage, c.settings, ["m", "m"]).design!.reach_s;
    const [from, to] = [before === null ? 0 : 60, 330];
    const part = cut(RECORD, from, to);
    const whole = through(c.stage, c.settings, RECORD);
    const night = through(c.stage, c.settings, part);
    let compared = 0;
    part.times.forEach((t, i) => {
      if (before !== null && t - before * 1e6 < RECORD.times[from - 1]! + 1) return;
      if (t + after * 1e6 >= RECORD.times[to]!) return;
      for (const channel of [0, 1]) {
        expect(night.columns[channel]![i]).toBe(whole.columns[channel]![from + i]);
        expect(night.marks[channel]![i]).toBe(whole.marks[channel]![from + i]);
      }
      compared++;
    });
    expect(compared).toBeGreaterThan(200);
  });
});

describe("moving the record in time moves the result, and nothing else", () => {
  everyCase((c) => {
    if (c.dated) return;
    const here = through(c.stage, c.settings, RECORD);
    const there = through(c.stage, c.settings, rows(420, 1_900_000_000_000_000));
    expect(there.columns).toEqual(here.columns);
    expect(there.marks).toEqual(here.marks);
  });
});
