import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { asideOf, imbalance, iso, readTexts } from "./in-memory.ts";

const T0 = Date.UTC(2031, 2, 4) * 1000;
const log = (times: number[]): string => `time,a\n${times.map((t, i) => `${iso(t)},${i}\n`).join("")}`;
const minutes = (...list: number[]): number[] => list.map((m) => T0 + m * 60e6);
const DAY = 1440;

async function read(times: number[], lateBy_us = 60e6) {
  const { rows, accounts } = await readTexts({ log: log(times) }, { lateBy_us });
  expect(imbalance(accounts[0]!.rows)).toBe(0);
  return { used: rows.map((r) => r[1]), aside: asideOf(accounts[0]!.rows) };
}

describe("a clock that jumps", () => {
  it("ahead and back costs the rows that jumped, wherever they stand", async () => {
    const far = 70 * 365 * DAY;
    expect(await read(minutes(0, 1, far, 2, 3, 4))).toEqual({
      used: [0, 1, 3, 4, 5],
      aside: { "stray-time": [4] },
    });
    expect(await read(minutes(far, 1, 2, 3, 4))).toEqual({
      used: [1, 2, 3, 4],
      aside: { "stray-time": [2] },
    });
    expect(await read(minutes(0, 1, 2, 3, far))).toEqual({
      used: [0, 1, 2, 3],
      aside: { "stray-time": [6] },
    });
    expect(await read(minutes(0, 1, far, far + 1, far + 2, far + 3, 2, 3, 4, 5))).toEqual({
      used: [0, 1, 6, 7, 8, 9],
      aside: { "stray-time": [4, 5, 6, 7] },
    });
    expect(await read(minutes(0, 1, far, 2, far + 9, 3, far + 20, 4, 5))).toEqual({
      used: [0, 1, 3, 5, 7, 8],
      aside: { "stray-time": [4, 6, 8] },
    });
  });
  it("ahead and stays is a gap", async () => {
    expect(await read(minutes(0, 1, 2, 600, 601, 602, 603))).toEqual({
      used: [0, 1, 2, 3, 4, 5, 6],
      aside: {},
    });
    expect(await read(minutes(0, 1, 2, 600))).toEqual({ used: [0, 1, 2, 3], aside: {} });
    const afterMonths = Array.from({ length: 100 }, (_, i) => (i < 50 ? i : 90 * DAY + i));
    expect((await read(minutes(...afterMonths))).used.length).toBe(100);
  });
  it("a late row after a gap does not undo the gap", async () => {
    expect(await read(minutes(0, 1, 2, 600, 3, 601, 602, 603))).toEqual({
      used: [0, 1, 2, 3, 5, 6, 7],
      aside: { late: [6] },
    });
  });
  it("back to an epoch costs the rows of the wrong clock", async () => {
    const reset = (Date.UTC(2000, 0, 1) * 1000 - T0) / 60e6;
    expect(await read(minutes(0, 1, 2, reset, reset + 1, reset + 2, reset + 3, 7, 8))).toEqual({
      used: [0, 1, 2, 7, 8],
      aside: { "stray-time": [5, 6, 7, 8] },
    });
  });
  it("from an epoch at the start costs the rows before the clock was set", async () => {
    for (const epoch of [0, Date.UTC(1980, 0, 6) * 1000, Date.UTC(2000, 0, 1) * 1000]) {
      const reset = (epoch - T0) / 60e6;
      const times = [...Array.from({ length: 60 }, (_, i) => reset + i), 0, 1, 2, 3];
      const { used, aside } = await read(minutes(...times));
      expect([used, aside]).toEqual([[60, 61, 62, 63], { "stray-time": [2, 3, 4, 5, 6] }]);
    }
    // Real data from those days, and elapsed time without a date, are left alone.
    const real = Array.from({ length: 60 }, (_, i) => (Date.UTC(2000, 0, 1) * 1000 - T0) / 60e6 + i);
    expect((await read(minutes(...real))).used.length).toBe(60);
  });
  it("sparse logs, whose every step is long, are read whole", async () => {
    for (const step of [60, DAY, 7 * DAY, 31 * DAY, 366 * DAY]) {
      const times = Array.from({ length: 70 }, (_, i) => i * step);
      expect((await read(minutes(...times))).used.length).toBe(70);
      expect(await read(minutes(...times.slice(0, 20), 200 * 366 * DAY, ...times.slice(20)))).toMatchObject({
        aside: { "stray-time": [22] },
      });
    }
  });
  it("in one wrong row costs only that row (property)", async () => {
    await fc.assert(
      fc.asyncProperty(
        fc.integer({ min: 4, max: 60 }),
        fc.nat(),
        fc.integer({ min: 2, max: 10_000 * 24 }),
        fc.boolean(),
        async (count, place, hours, ahead) => {
          const times = Array.from({ length: count }, (_, i) => T0 + i * 1e6);
          const at = 3 + (place % (count - 3));
          const stray = times[at]! + (ahead ? 1 : -1) * hours * 3600e6;
          if (Math.abs(stray) > 9e15 || at > count - 3) return;
          times[at] = stray;
          const { used, aside } = await read(times);
          expect(used.length).toBe(count - 1);
          expect(Object.values(aside)).toEqual([[at + 2]]);
        },
      ),
      { numRuns: 200 },
    );
  });
});
