import { readFileSync } from "node:fs";
import { gunzipSync } from "node:zlib";
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { MISSING, SCREENED, SUSPECT } from "../../src/signal/marks.ts";
import { hampelByTime } from "../../src/signal/robust.ts";
import reference from "../reference/19-mad-hampel.json" with { type: "json" };
import { codesOf, designOf, everySecond, rejectedAt, through } from "./row-stages.ts";

const NONE = Number.NaN;

describe("range", () => {
  it("keeps its limits and rejects what lies beyond, with the raw values in the account", () => {
    const out = through("screen", { range: [0, 6] }, everySecond([0, -0.001, 6, 6.001, NONE, 3]));
    expect(rejectedAt(out)).toEqual([1, 3]);
    expect(out.columns[0]).toEqual([0, NONE, 6, NONE, NONE, 3]);
    expect(out.marks[0]).toEqual([0, SCREENED, 0, SCREENED, MISSING, 0]);
    expect(out.effects[0]).toMatchObject({
      rejected: { range: 2 },
      firstRejected: [
        { time_us: 1e6, value: -0.001, reason: "range" },
        { time_us: 3e6, value: 6.001, reason: "range" },
      ],
    });
  });

  it("lists the first twenty and counts all", () => {
    const out = through(
      "screen",
      { range: [0, 1] },
      everySecond(Array.from({ length: 100 }, (_, i) => i + 2)),
    );
    expect(out.effects[0]!.rejected).toEqual({ range: 100 });
    expect(out.effects[0]!.firstRejected.map((f) => f.value)).toEqual(
      Array.from({ length: 20 }, (_, i) => i + 2),
    );
  });
});

describe("rate of change", () => {
  const test = { "rate-of-change": "0.5 m/s" };

  it("rejects what is too far from the last value kept, and takes what just fits", () => {
    expect(rejectedAt(through("screen", test, everySecond([6.1, 6.6, 9, 6.6, 7.1, 7.7])))).toEqual([2, 5]);
  });

  it("lets the allowance grow with time, so that a true step is taken in the end", () => {
    expect(rejectedAt(through("screen", test, everySecond([0, 0, 2, 2, 2, 2, 2])))).toEqual([2, 3, 4]);
  });

  it("does not let a bad first value throw out the rest", () => {
    expect(rejectedAt(through("screen", test, everySecond([900, 1, 1, 1])))).toEqual([0]);
    expect(rejectedAt(through("screen", test, everySecond([1, NONE, 9])))).toEqual([2]);
    expect(rejectedAt(through("screen", test, everySecond([5])))).toEqual([]);
  });

  it("reads other units of time", () => {
    const slow = through("screen", { "rate-of-change": "6 m/min" }, everySecond([0, 0.1, 0.3]));
    expect(rejectedAt(slow)).toEqual([2]);
  });
});

describe("spike", () => {
  it.each(reference.cases.filter((c) => c.inputs.edge === "shrink"))(
    "reference 19, textbook floor of 0: $id",
    ({ inputs, expected }) => {
      const spike = { over: `${2 * inputs.halfWidth!} s`, deviations: inputs.threshold!, floor: 0 };
      expect(rejectedAt(through("screen", { spike }, everySecond(inputs.x)))).toEqual(
        expected.outlierIndices0,
      );
    },
  );

  it("agrees with the whole-record identifier on uneven rows with holes, for any block", () => {
    fc.assert(
      fc.property(
        fc.array(fc.tuple(fc.integer({ min: 1, max: 4000 }), fc.integer({ min: -9, max: 9 }), fc.nat(9)), {
          minLength: 1,
          maxLength: 60,
        }),
        fc.constantFrom(1, 7, 1000),
        (steps, blockRows) => {
          let t = 0;
          const times = steps.map(([step]) => (t += step * 1000));
          const values = steps.map(([, v, hole]) => (hole === 0 ? NONE : hole === 1 ? 40 * v : v));
          const spike = { over: "12 s", deviations: 3, floor: 0.5 };
          const out = through("screen", { spike }, { times, columns: [values] }, { blockRows });
          const { outliers } = hampelByTime(Float64Array.from(times), Float64Array.from(values), 6e6, {
            deviations: 3,
            floor: 0.5,
            ends: "part-window",
          });
          const near = (i: number) =>
            values.filter((v, j) => !Number.isNaN(v) && Math.abs(times[j]! - times[i]!) <= 6e6).length;
          expect(rejectedAt(out)).toEqual(
            Array.from(outliers.keys()).filter((i) => outliers[i] === 1 && near(i) >= 5),
          );
        },
      ),
    );
  });

  it("leaves a flat stretch with single steps of its resolution alone, and still finds a spike in it", () => {
    const flat: number[] = Array.from({ length: 300 }, (_, i) =>
      i % 7 === 3 ? 6.11 : i % 11 === 5 ? 6.09 : 6.1,
    );
    const spike = { over: "30 s", deviations: 6 };
    expect(rejectedAt(through("screen", { spike }, everySecond(flat)))).toEqual([]);
    flat[150] = 6.5;
    expect(rejectedAt(through("screen", { spike }, everySecond(flat)))).toEqual([150]);
  });

  it("finds spikes in a stretch that does not move at all, and leaves a single step of resolution", () => {
    const flat = new Array(200).fill(5);
    flat[50] = 500;
    flat[58] = 500;
    flat[120] = 5.01;
    expect(rejectedAt(through("screen", { spike: { over: "30 s" } }, everySecond(flat)))).toEqual([50, 58]);
  });

  it("judges nothing by fewer than five values", () => {
    const out = through("screen", { spike: { over: "4 s", deviations: 1 } }, everySecond([1, 1, 99, 1]));
    expect(rejectedAt(out)).toEqual([]);
  });

  // With the documented settings: the default of 10 deviations, over ten to twenty row intervals.
  const kobe = readFileSync(new URL("../data/kobe_seismogram_1hz.csv", import.meta.url), "utf8");
  const trace = gunzipSync(readFileSync(new URL("../data/ecg_360hz.csv.gz", import.meta.url))).toString();
  const column = (text: string) =>
    text
      .trim()
      .split("\n")
      .slice(1)
      .map((line) => Number(line.split(",")[1]));

  it.each([10, 12, 14, 20])("takes no wave of the earthquake for a spike, over %i row intervals", (n) => {
    const out = through("screen", { spike: { over: `${n} s` } }, everySecond(column(kobe)));
    expect(rejectedAt(out)).toEqual([]);
  });

  it.each(["28 ms", "34 ms", "39 ms", "56 ms"])("takes no heartbeat for a spike, over %s", (over) => {
    const ecg = column(trace);
    const times = ecg.map((_, i) => Math.round((i * 1e6) / 360));
    const spike = { over };
    const out = through("screen", { spike }, { times, columns: [ecg] }, { units: ["mV"] });
    expect(rejectedAt(out)).toEqual([]);
    // And what is no beat is found among them.
    const spiked = [...ecg];
    spiked[50_000] = ecg[50_000]! + 5;
    const found = through("screen", { spike }, { times, columns: [spiked] }, { units: ["mV"] });
    expect(rejectedAt(found)).toEqual([50_000]);
  });
});

describe("stuck", () => {
  const stuck = { over: "5 s", within: 0.01 };

  it("rejects all of a stretch that stands still for longer than the span, and not one as long", () => {
    const still = [1, 2, 3, 3, 3.01, 3, 3, 3, 4, 5, 5, 5, 5, 5, 5, 5, 6];
    expect(rejectedAt(through("screen", { stuck }, everySecond(still)))).toEqual([9, 10, 11, 12, 13, 14, 15]);
  });

  it("is the union of all stretches by definition, whatever the block", () => {
    fc.assert(
      fc.property(
        fc.array(fc.tuple(fc.integer({ min: 1, max: 3 }), fc.integer({ min: 0, max: 3 }), fc.nat(6)), {
          minLength: 1,
          maxLength: 80,
        }),
        fc.constantFrom(1, 7, 1000),
        (steps, blockRows) => {
          let t = 0;
          const times = steps.map(([step]) => (t += step * 1e6));
          const values = steps.map(([, v, hole]) => (hole === 0 ? NONE : v));
          const out = through(
            "screen",
            { stuck: { over: "5 s", within: 1 } },
            { times, columns: [values] },
            { blockRows },
          );
          const present = values.flatMap((v, i) => (Number.isNaN(v) ? [] : [i]));
          const wanted = new Set<number>();
          for (let a = 0; a < present.length; a++)
            for (let b = a + 1; b < present.length; b++) {
              const run = present.slice(a, b + 1);
              const joined = run.every((i, k) => k === 0 || times[i]! - times[run[k - 1]!]! <= 5e6);
              const all = run.map((i) => values[i]!);
              if (!joined || Math.max(...all) - Math.min(...all) > 1) break;
              if (times[run.at(-1)!]! - times[run[0]!]! > 5e6) for (const i of run) wanted.add(i);
            }
          expect(rejectedAt(out)).toEqual([...wanted].sort((x, y) => x - y));
        },
      ),
    );
  });

  it("does not join equal values across a long gap", () => {
    const out = through("screen", { stuck }, { times: [0, 1e6, 900e6, 901e6], columns: [[5, 5, 5, 5]] });
    expect(rejectedAt(out)).toEqual([]);
  });
});

describe("agreement", () => {
  const agree = { with: "b", within: 0.02 };

  it("calls both channels suspect and keeps their values", () => {
    const out = through("screen", { agree }, everySecond([1, 1.02, 1.03, NONE, 5], [1, 1, 1, 1, NONE]));
    for (const c of [0, 1]) {
      expect(out.marks[c]!.map((m) => m & SUSPECT)).toEqual([0, 0, SUSPECT, 0, 0]);
      expect(out.effects[c]!.suspect).toEqual({ agree: 1 });
    }
    expect(out.columns[0]).toEqual([1, 1.02, 1.03, NONE, 5]);
    expect(out.effects[1]!.firstSuspect).toEqual([{ time_us: 2e6, value: 1, reason: "agree" }]);
  });
});

describe("order", () => {
  it("each test sees what the earlier ones left", () => {
    // 900 is out of range, so it neither moves the rate's last value nor counts as a spike or a stuck value.
    const x = [1, 1.1, 900, 1.2, 7, 1.3, 1.4, 1.5];
    const all = { range: [0, 10], "rate-of-change": "1 m/s", spike: { over: "7 s", deviations: 3 } };
    const { effects } = through("screen", all, everySecond(x));
    expect(effects[0]!.rejected).toEqual({ range: 1, "rate-of-change": 1, spike: 0 });
    expect(designOf("screen", all).design!.notes).toEqual({
      order_of_tests: ["range", "rate-of-change", "spike"],
    });
  });
});

describe("a stretch of time and some channels", () => {
  it("leaves everything else alone", () => {
    const stretch = { range: [0, 1], from: "1970-01-01T00:00:01Z", until: "1970-01-01T00:00:03Z" };
    const out = through("screen", stretch, everySecond([9, 9, 9, 9], [9, 9, 9, 9]), { selected: [1] });
    expect(rejectedAt(out, 0)).toEqual([]);
    expect(rejectedAt(out, 1)).toEqual([1, 2]);
  });
});

describe("any rows, any block", () => {
  const SETTINGS = [
    { range: [-5, 5] },
    { "rate-of-change": "2 m/s" },
    { spike: { over: "9 s", deviations: 2 } },
    { stuck: { over: "4 s", within: 0.5 } },
    { agree: { with: "b", within: 3 } },
    {
      range: [-8, 8],
      "rate-of-change": "6 m/s",
      spike: { over: "9 s", deviations: 2 },
      stuck: { over: "4 s", within: 0.5 },
      agree: { with: "b", within: 3 },
    },
  ];
  it("keeps number, order and times of rows, and every value that is not rejected", () => {
    fc.assert(
      fc.property(
        fc.array(
          fc.tuple(fc.nat(3000), fc.integer({ min: -9, max: 9 }), fc.integer({ min: -9, max: 9 }), fc.nat(9)),
          {
            minLength: 1,
            maxLength: 80,
          },
        ),
        fc.constantFrom(...SETTINGS),
        (steps, settings) => {
          let t = 0;
          const times = steps.map(([step]) => (t += (step + 1) * 1000));
          const columns = [
            steps.map(([, a, , hole]) => (hole === 0 ? NONE : a)),
            steps.map(([, , b, hole]) => (hole === 1 ? NONE : b)),
          ];
          const whole = through("screen", settings, { times, columns }, { blockRows: 65_536 });
          expect(whole.times).toEqual(times);
          for (const c of [0, 1]) {
            const counted = Object.values(whole.effects[c]!.rejected).reduce((a, b) => a + b, 0);
            expect(rejectedAt(whole, c).length).toBe(counted);
            whole.marks[c]!.forEach((mark, i) => {
              const kept = (mark & SCREENED) === 0 ? columns[c]![i]! : NONE;
              expect(Object.is(whole.columns[c]![i], kept)).toBe(true);
              expect((mark & MISSING) !== 0).toBe(Number.isNaN(columns[c]![i]!));
            });
          }
          for (const blockRows of [1, 7, 1000])
            expect(through("screen", settings, { times, columns }, { blockRows })).toEqual(whole);
        },
      ),
      { numRuns: 300 },
    );
  });
});

describe("mistakes", () => {
  const wrong: [string, string, Record<string, unknown>, string[]?, number[]?][] = [
    ["no test", "screen-nothing", {}],
    ["an empty range", "empty-range", { range: [6, 0] }],
    ["an empty stretch", "empty-stretch", { range: [0, 6], from: "2031-01-02", until: "2031-01-01" }],
    ["one range for two units", "screen-mixed-units", { range: [0, 6] }, ["m", "m3/s"]],
    ["a floor for two units", "screen-mixed-units", { spike: { over: "9 s", floor: 1 } }, ["m", "degC"]],
    ["a rate in another unit", "rate-unit", { "rate-of-change": "0.5 mm/s" }],
    ["no such channel", "unknown-channel", { agree: { with: "zz", within: 1 } }],
    ["a channel with itself", "agree-alone", { agree: { with: "a", within: 1 } }],
    ["channels that cannot be compared", "agree-units", { agree: { with: "b", within: 1 } }, ["m", "V"]],
  ];
  it.each(wrong)("%s: %s", (_, code, settings, units, selected) => {
    expect(codesOf("screen", settings, units, selected)).toEqual([code]);
  });

  it("spans that hold too few rows are seen once the log's interval is known", () => {
    const at = (settings: Record<string, unknown>, interval: number) =>
      designOf("screen", settings).design!.checkInterval!(interval).map((p) => p.code);
    expect(at({ spike: { over: "4 s" }, stuck: { over: "1 s" } }, 1)).toEqual([]);
    expect(at({ spike: { over: "3.9 s" } }, 1)).toEqual(["spike-span-below-log"]);
    expect(at({ stuck: { over: "1 s" } }, 2)).toEqual(["stuck-span-below-log"]);
  });
});
