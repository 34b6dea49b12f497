import { describe, expect, it } from "vitest";
import { peakGain } from "../../src/signal/response.ts";
import { designWindowedSinc } from "../../src/signal/windowed-sinc.ts";
import reference from "../reference/15-decimation.json" with { type: "json" };
import { amongZeros, slide } from "./slide.ts";

const caseOf = (id: string) => reference.cases.find((c) => c.id === id)!;

function compare(
  got: Map<number, number>,
  from: number,
  wanted: readonly number[],
  x: readonly number[],
): void {
  const limit = 1e-12 * Math.max(...x.map(Math.abs));
  for (const [i, y] of wanted.entries()) expect(Math.abs(got.get(from + i)! - y)).toBeLessThanOrEqual(limit);
}

// The case up2down3 raises the rate first, which no stage does.
describe("decimating windows against reference 15", () => {
  it.each(["ma4-by4", "hamm11-by3"])("%s: past only, with zeros around the record", (id) => {
    const { inputs, expected } = caseOf(id);
    const taps = Float64Array.from(inputs.taps as number[]);
    const n = taps.length;
    // Enough zeros at the end for the last output, which lies on the coarse grid.
    const x = amongZeros(inputs.x!, n - 1, n - 1);
    const got = slide(x, { taps, after: 0, keepEvery: inputs.down! }, 1 - n);
    compare(got, 0, expected.upfirdn!, inputs.x!);
  });

  it("hamm11-by3: centred, only kept outputs computed, only full windows", () => {
    const { inputs, expected } = caseOf("hamm11-by3");
    const taps = Float64Array.from(inputs.taps as number[]);
    const { firstInputIndex, step, y } = expected.centredFullWindowOnly!;
    const got = slide(inputs.x!, { taps, after: 5, keepEvery: step });
    compare(got, firstInputIndex / step, y, inputs.x!);
    expect(Array.from(got.values()).filter((v) => !Number.isNaN(v)).length).toBe(y.length);
    const padded = slide(amongZeros(inputs.x!, 5, 5), { taps, after: 5, keepEvery: step }, -5);
    compare(padded, 0, expected.centredZeroPadded!, inputs.x!);
  });

  it.each(["scipy-decimate-q2", "scipy-decimate-q5"])("%s: with the filter designed here", (id) => {
    const { inputs, expected } = caseOf(id);
    const q = inputs.factor!;
    const taps = designWindowedSinc({
      taps: 20 * q + 1,
      shape: "low-pass",
      edges: [0.5 / q],
      window: "hamming",
    });
    const got = slide(amongZeros(inputs.x!, 10 * q, 10 * q), { taps, after: 10 * q, keepEvery: q }, -10 * q);
    compare(got, 0, expected.y!, inputs.x!);
  });

  it("alias-rejection-q4-N41: worst gain at and above the new Nyquist frequency", () => {
    const { inputs, expected } = caseOf("alias-rejection-q4-N41");
    const design = inputs.taps as unknown as { firwin: number; cutoffCyclesPerSample: number };
    const taps = designWindowedSinc({
      taps: design.firwin,
      shape: "low-pass",
      edges: [design.cutoffCyclesPerSample],
      window: "hamming",
    });
    const { gain, frequency } = peakGain(taps, expected.newNyquistCyclesPerSample!, 0.5);
    expect(Math.abs(gain / expected.maxGainAtOrAboveNewNyquist! - 1)).toBeLessThan(1e-6);
    expect(frequency).toBeCloseTo(expected.worstAt!, 9);
  });
});
