import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { RemovalStrip } from "../../src/engine/removal-strip.ts";

describe("removal strip", () => {
  it("keeps all the power, and the largest removal with its place, in at most 256 columns", () => {
    fc.assert(
      fc.property(
        fc.integer({ min: -5000, max: 5000 }),
        fc.array(fc.record({ step: fc.integer({ min: 1, max: 40 }), r: fc.integer({ min: -9, max: 9 }) }), {
          minLength: 1,
          maxLength: 900,
        }),
        (start, list) => {
          const strip = new RemovalStrip();
          let k = start;
          let square = 0;
          let largest = 0;
          for (const { step, r } of list) {
            k += step;
            strip.add(k, r);
            square += r * r;
            largest = Math.max(largest, Math.abs(r));
          }
          const columns = strip.list();
          expect(columns.reduce((s, c) => s + c.square, 0)).toBe(square);
          expect(columns.reduce((s, c) => s + c.samples, 0)).toBe(list.length);
          expect(Math.max(...columns.map((c) => Math.abs(c.largest)))).toBe(largest);
          expect((columns.at(-1)!.first - columns[0]!.first) / strip.width).toBeLessThan(256);
          for (const [i, c] of columns.entries()) {
            expect(c.first % strip.width === 0).toBe(true);
            expect(c.largestAt).toBeGreaterThanOrEqual(c.first);
            expect(c.largestAt).toBeLessThan(c.first + strip.width);
            if (i > 0) expect(c.first).toBeGreaterThan(columns[i - 1]!.first);
          }
        },
      ),
      { numRuns: 300 },
    );
  });
});
