import { describe, expect, it } from "vitest";
import reference from "../reference/11-centred-filtering-edges.json" with { type: "json" };
import { amongZeros, slide } from "./slide.ts";

type Case = (typeof reference.cases)[number];

const ofEdge = (start: string) => reference.cases.filter((c) => c.inputs.edge?.startsWith(start));
const scale = (c: Case) => 1e-12 * Math.max(...c.inputs.x.map((v) => Math.abs(v ?? 0)));
/** Reference weights run in order of time; taps run against it. */
const taps = (c: Case) => Float64Array.from(c.inputs.weights!).reverse();

function compare(got: Map<number, number>, c: Case, from = 0): void {
  for (const [i, wanted] of c.expected.y.entries()) {
    const y = got.get(from + i)!;
    if (wanted === null) expect(y).toBeNaN();
    else expect(Math.abs(y - wanted)).toBeLessThanOrEqual(scale(c));
  }
}

describe("windows against reference 11", () => {
  it.each(ofEdge("full windows only"))("$id", (c) => {
    const n = c.inputs.weights!.length;
    const even = n % 2 === 0;
    const after = even ? n / 2 : (n - 1) / 2;
    const got = slide(c.inputs.x, { taps: taps(c), after, betweenSamples: even });
    // An even window's output with index k lies at k + 1/2.
    const first = c.expected.firstFullIndexCentre! - (even ? 0.5 : 0);
    compare(got, c, first);
    const full = Array.from(got.values()).filter((v) => !Number.isNaN(v));
    expect(full.length).toBe(c.expected.y.length);
  });

  it.each(ofEdge("shrink"))("$id", (c) => {
    const after = (c.inputs.weights!.length - 1) / 2;
    compare(slide(c.inputs.x, { taps: taps(c), after, ends: "part-window" }), c);
  });

  it.each(ofEdge("causal"))("$id", (c) => {
    // The reference counts taps back from the present; before its start the signal is 0.
    const n = c.inputs.weights!.length;
    const x = amongZeros(c.inputs.x as number[], n - 1, 0);
    compare(slide(x, { taps: Float64Array.from(c.inputs.weights!), after: 0 }, 1 - n), c);
  });

  it.each(ofEdge("constant-zero"))("$id, the zeros written out", (c) => {
    const half = (c.inputs.weights!.length - 1) / 2;
    compare(slide(amongZeros(c.inputs.x as number[], half, half), { taps: taps(c), after: half }, -half), c);
  });

  // Reflected, repeated and wrapped ends are no treatments of ours: there, the outputs with a full window.
  it.each([...ofEdge("reflect"), ...ofEdge("mirror"), ...ofEdge("nearest"), ...ofEdge("wrap")])(
    "$id, inside the ends",
    (c) => {
      const half = (c.inputs.weights!.length - 1) / 2;
      const got = slide(c.inputs.x, { taps: taps(c), after: half });
      for (let i = half; i + half < c.inputs.x.length; i++)
        expect(Math.abs(got.get(i)! - c.expected.y[i]!)).toBeLessThanOrEqual(scale(c));
    },
  );

  it.each(reference.cases.filter((c) => c.inputs.minimumValid !== undefined))("$id", (c) => {
    const n = c.inputs.window!;
    const coverage = c.inputs.minimumValid! / n;
    compare(slide(c.inputs.x, { taps: new Float64Array(n).fill(1 / n), after: 1, coverage, equal: true }), c);
  });

  it("uses every case of the file", () => {
    const starts = ["full", "shrink", "causal", "constant-zero", "reflect", "mirror", "nearest", "wrap"];
    const used = starts.reduce((sum, start) => sum + ofEdge(start).length, 0);
    const counted = reference.cases.filter((c) => c.inputs.minimumValid !== undefined).length;
    expect(used + counted).toBe(reference.cases.length);
  });
});
