import fc from "fast-check";
import { describe, expect, it } from "vitest";
import {
  coarserGrid,
  fallsOnMultiplesOf,
  firstIndexAtOrAfter,
  halfStepLater,
  intervalSeconds,
  lastIndexAtOrBefore,
  makeGrid,
  timeOf,
  timeSince,
} from "../../src/signal/grid.ts";

/** Exact time of sample k as a fraction of microseconds, by big integers: the naive twin. */
function exactTime(g: ReturnType<typeof makeGrid>, k: number): { num: bigint; den: bigint } {
  const m = BigInt(g.stride) * BigInt(k) + BigInt(g.offset);
  return { num: BigInt(g.anchor_us) * BigInt(g.halfDen) + m * BigInt(g.halfNum), den: BigInt(g.halfDen) };
}
const floorDiv = (a: bigint, b: bigint) => (a >= 0n ? a / b : -((-a + b - 1n) / b));

const grids = fc
  .record({
    num: fc.integer({ min: 720, max: 86_400_000_000 }),
    den: fc.integer({ min: 1, max: 720 }),
    anchor: fc.integer({ min: -1_000_000_000, max: 2_000_000_000_000_000 }),
    factor: fc.integer({ min: 1, max: 60 }),
    half: fc.boolean(),
  })
  .map(({ num, den, anchor, factor, half }) => {
    const g = coarserGrid(makeGrid(num, den, anchor), factor);
    return half ? halfStepLater(g) : g;
  });
const times = fc.integer({ min: 0, max: 4_000_000_000_000_000 });

describe("grid", () => {
  it("rounds the exact time of a sample half up to a microsecond", () => {
    fc.assert(
      fc.property(grids, times, (g, t) => {
        const k = lastIndexAtOrBefore(g, t);
        const { num, den } = exactTime(g, k);
        expect(BigInt(timeOf(g, k))).toBe(floorDiv(2n * num + den, 2n * den));
      }),
      { numRuns: 2000 },
    );
  });

  it("finds the index at or before, and at or after, any time exactly", () => {
    fc.assert(
      fc.property(grids, times, (g, t) => {
        const last = lastIndexAtOrBefore(g, t);
        const first = firstIndexAtOrAfter(g, t);
        const notAfter = (k: number) => {
          const { num, den } = exactTime(g, k);
          return num <= BigInt(t) * den;
        };
        expect(notAfter(last)).toBe(true);
        expect(notAfter(last + 1)).toBe(false);
        expect(first).toBe(timeSince(g, last, t) === 0 ? last : last + 1);
      }),
      { numRuns: 2000 },
    );
  });

  it("holds 1/360 s exactly over a century", () => {
    const g = makeGrid(25_000, 9);
    expect(intervalSeconds(g)).toBeCloseTo(1 / 360, 15);
    expect(timeOf(g, 360 * 86_400 * 36_525)).toBe(36_525 * 86_400_000_000);
    expect(timeOf(g, 1)).toBe(2778);
    expect(timeOf(g, 2)).toBe(5556);
  });

  it("knows whether its times are whole seconds or milliseconds", () => {
    expect(fallsOnMultiplesOf(makeGrid(60_000_000, 1), 1_000_000)).toBe(true);
    expect(fallsOnMultiplesOf(halfStepLater(makeGrid(1_000_000, 1)), 1_000_000)).toBe(false);
    expect(fallsOnMultiplesOf(halfStepLater(makeGrid(1_000_000, 1)), 1_000)).toBe(true);
    expect(fallsOnMultiplesOf(makeGrid(25_000, 9), 1_000)).toBe(false);
  });
});
