import fc from "fast-check";
import { describe, expect, it } from "vitest";
import type { GridBlock } from "../../src/signal/grid-block.ts";
import { END, FILLED, MISSING, SCREENED, THIN } from "../../src/signal/marks.ts";
import { WindowKernel, type WindowOptions } from "../../src/signal/window-kernel.ts";

const plain: WindowOptions = {
  taps: Float64Array.of(0.25, 0.5, 0.25),
  after: 1,
  ends: "blank",
  coverage: 1,
  keepEvery: 1,
  equal: false,
  betweenSamples: false,
};

function run(
  options: Partial<WindowOptions>,
  x: readonly number[],
  { first = 0, block = x.length, marks }: { first?: number; block?: number; marks?: readonly number[] } = {},
): { first: number; values: number[]; marks: number[] } {
  const kernel = new WindowKernel({ ...plain, ...options });
  const out: GridBlock[] = [];
  for (let i = 0; i < x.length; i += block) {
    const values = Float64Array.from(x.slice(i, i + block));
    const held = Uint8Array.from(values, (v, j) => marks?.[i + j] ?? (Number.isNaN(v) ? MISSING : 0));
    kernel.push({ first: first + i, values, marks: held }, (b) => out.push(b));
  }
  kernel.flush((b) => out.push(b));
  return {
    first: out[0]?.first ?? Number.NaN,
    values: out.flatMap((b) => Array.from(b.values)),
    marks: out.flatMap((b) => Array.from(b.marks)),
  };
}

const NO = Number.NaN;

describe("sliding window", () => {
  it("is blank where the window is not full, and says whether the input was there", () => {
    const y = run({}, [1, 2, 3, NO, 5, 6, 7]);
    expect(y.values).toEqual([NO, 2, NO, NO, NO, 6, NO]);
    expect(y.marks.map((m) => m & MISSING)).toEqual([MISSING, 0, MISSING, MISSING, MISSING, 0, MISSING]);
    expect(y.marks[0]! & END).toBe(END);
    expect(y.marks[3]! & END).toBe(0);
  });

  it("takes the part inside the run, weights rescaled, when told to", () => {
    const y = run({ ends: "part-window" }, [1, 2, 4, NO, 8]);
    expect(y.values[0]).toBeCloseTo((0.5 * 1 + 0.25 * 2) / 0.75, 14);
    expect(y.values[1]).toBeCloseTo(0.25 + 1 + 1, 14);
    expect(y.values[2]).toBeCloseTo((0.25 * 2 + 0.5 * 4) / 0.75, 14);
    expect(y.values[3]).toBeNaN();
    expect(y.values[4]).toBe(8);
    expect(y.marks).toEqual([END, 0, END, MISSING, END]);
  });

  it("turns the signal about its end point when told to: a straight line stays a straight line", () => {
    const y = run(
      { ends: "turned", taps: Float64Array.of(0.1, 0.2, 0.4, 0.2, 0.1), after: 2 },
      [3, 5, 7, 9, 11, 13],
    );
    y.values.forEach((v, i) => expect(v).toBeCloseTo(3 + 2 * i, 12));
    expect(y.marks).toEqual([END, END, 0, 0, END, END]);
  });

  it("leaves missing samples out when enough are present, and marks the result thin", () => {
    const taps = new Float64Array(5).fill(0.2);
    const y = run({ taps, after: 2, coverage: 0.8, equal: true }, [1, 2, NO, 4, 5, 6, 7]);
    expect(y.values[2]).toBeCloseTo((1 + 2 + 4 + 5) / 4, 14);
    expect(y.marks[2]).toBe(THIN);
    expect(y.values[1]).toBeNaN();
    expect(y.values[4]).toBeCloseTo((4 + 5 + 6 + 7) / 4, 14);
  });

  it("says screened only where nothing but rejected values lies in the window", () => {
    const y = run({}, [1, NO, NO, NO, 5], { marks: [0, SCREENED, SCREENED, SCREENED, 0] });
    expect(y.marks[2]).toBe(SCREENED);
    expect(y.marks[1]! & MISSING).toBe(MISSING);
  });

  it("hands a filled sample's mark on to exactly its reach", () => {
    const n = 9;
    const x = Array.from({ length: 60 }, (_, i) => i);
    const marks = x.map((i) => (i === 30 ? FILLED : 0));
    const centred = run({ taps: new Float64Array(n).fill(1 / n), after: 4, equal: true }, x, { marks });
    const at = (y: { marks: number[] }) => y.marks.flatMap((m, i) => ((m & FILLED) !== 0 ? [i] : []));
    expect(at(centred)).toEqual([26, 27, 28, 29, 30, 31, 32, 33, 34]);
    const past = run({ taps: new Float64Array(n).fill(1 / n), after: 0, equal: true }, x, { marks });
    expect(at(past)).toEqual([30, 31, 32, 33, 34, 35, 36, 37, 38]);
  });

  it("lets one missing sample touch exactly N outputs of an N-tap filter", () => {
    fc.assert(
      fc.property(fc.integer({ min: 1, max: 21 }), fc.integer({ min: 30, max: 60 }), (n, gap) => {
        const x = Array.from({ length: 100 }, (_, i) => (i === gap ? NO : i));
        const full = Array.from({ length: 100 }, (_, i) => i);
        const options = { taps: new Float64Array(n).fill(1 / n), after: Math.floor(n / 2) };
        const with1 = run(options, x).values;
        const without = run(options, full).values;
        expect(with1.filter((v, i) => Number.isNaN(v) && !Number.isNaN(without[i]!)).length).toBe(n);
      }),
    );
  });

  it("gives the same bits however the input is cut, with gaps, marks and every policy", () => {
    const arbitrary = fc.record({
      n: fc.integer({ min: 1, max: 12 }),
      past: fc.boolean(),
      ends: fc.constantFrom("blank" as const, "part-window" as const, "turned" as const),
      coverage: fc.constantFrom(1, 0.6),
      keepEvery: fc.integer({ min: 1, max: 4 }),
      equal: fc.boolean(),
      first: fc.integer({ min: -50, max: 50 }),
      x: fc.array(
        fc.oneof(
          { weight: 5, arbitrary: fc.double({ min: -9, max: 9, noNaN: true }) },
          { weight: 1, arbitrary: fc.constant(NO) },
        ),
        {
          minLength: 1,
          maxLength: 70,
        },
      ),
      block: fc.constantFrom(1, 2, 7, 33),
    });
    fc.assert(
      fc.property(arbitrary, ({ n, past, ends, coverage, keepEvery, equal, first, x, block }) => {
        const taps = equal
          ? new Float64Array(n).fill(1 / n)
          : Float64Array.from({ length: n }, (_, i) => 1 + i);
        const even = n % 2 === 0 && !past;
        const options = {
          taps,
          after: past ? 0 : Math.floor(n / 2),
          ends,
          coverage,
          keepEvery: even ? 1 : keepEvery,
          equal,
          betweenSamples: even,
        };
        const marks = x.map((v, i) => (Number.isNaN(v) ? MISSING : i % 11 === 0 ? FILLED : 0));
        const whole = run(options, x, { first, marks });
        expect(run(options, x, { first, marks, block })).toEqual(whole);
      }),
      { numRuns: 1500 },
    );
  });

  it("computes only the outputs kept, and the same ones", () => {
    const x = Array.from({ length: 200 }, (_, i) => Math.sin(i) * 100);
    const taps = Float64Array.from({ length: 11 }, (_, i) => 1 / (1 + i));
    const all = run({ taps, after: 5 }, x, { first: 17 });
    const kept = run({ taps, after: 5, keepEvery: 6 }, x, { first: 17 });
    expect(kept.first).toBe(3);
    expect(kept.values).toEqual(all.values.filter((_, i) => (17 + i) % 6 === 0));
  });
});
