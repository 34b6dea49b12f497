import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { runningMean } from "../../src/signal/running-mean.ts";

function mean(x: Float64Array, startIndex: number, n: number): Float64Array {
  const out = new Float64Array(x.length - n + 1);
  runningMean(x, 0, startIndex, n, out, 0, out.length);
  return out;
}

describe("running mean", () => {
  it("agrees with the mean taken sample by sample, to a rounding or two", () => {
    fc.assert(
      fc.property(
        fc.array(fc.double({ min: -1e3, max: 1e3, noNaN: true }), { minLength: 1, maxLength: 80 }),
        fc.integer({ min: 1, max: 40 }),
        fc.integer({ min: -100, max: 100 }),
        (list, length, startIndex) => {
          const n = Math.min(length, list.length);
          const x = Float64Array.from(list);
          mean(x, startIndex, n).forEach((y, k) => {
            let sum = 0;
            for (let i = 0; i < n; i++) sum += x[k + i]!;
            expect(Math.abs(y - sum / n)).toBeLessThanOrEqual(1e-12);
          });
        },
      ),
      { numRuns: 500 },
    );
  });

  it("does not depend on how the outputs are cut up, bit for bit", () => {
    const x = Float64Array.from({ length: 500 }, (_, i) => Math.sin(i * i) * 10 ** (i % 7));
    const n = 37;
    const startIndex = 1001;
    const whole = mean(x, startIndex, n);
    for (const step of [1, 7, 36, 37, 38, 200]) {
      const out = new Float64Array(whole.length);
      for (let k = 0; k < out.length; k += step)
        runningMean(x, k, startIndex + k, n, out, k, Math.min(step, out.length - k));
      expect(out).toEqual(whole);
    }
  });

  it("leaves no error behind a huge sample: zeros after 1e15 give exactly 0", () => {
    const x = new Float64Array(300);
    x[100] = 1e15;
    x[101] = 0.1;
    const y = mean(x, 12_345, 61);
    for (let k = 102; k < y.length; k++) expect(y[k]).toBe(0);
  });

  it("keeps a constant exactly that constant", () => {
    for (const c of [0.1, 1 / 3, 21.5, -1013.25, 6.02e23])
      for (const n of [3, 10, 61, 1000])
        expect(new Set(mean(new Float64Array(1500).fill(c), 7, n))).toEqual(new Set([c]));
  });
});
