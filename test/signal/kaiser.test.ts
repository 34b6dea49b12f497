import { describe, expect, it } from "vitest";
import { kaiserAttenuation, kaiserBeta, kaiserTaps } from "../../src/signal/kaiser.ts";
import reference from "../reference/04-kaiser-formulas.json" with { type: "json" };

const near = (value: number, wanted: number) =>
  expect(Math.abs(value - wanted)).toBeLessThanOrEqual(reference.tolerance.rel * Math.abs(wanted));

describe("Kaiser's formulas against reference 04", () => {
  it.each(reference.cases.filter((c) => c.id.startsWith("beta")))("$id", ({ inputs, expected }) => {
    near(kaiserBeta(inputs.attenuationDb!), expected.beta as number);
  });
  it.each(reference.cases.filter((c) => c.id.startsWith("order")))("$id", ({ inputs, expected }) => {
    // The variant of 1974 with the constant 7.95; the book's 8 would give the order, one less than the taps.
    expect(kaiserTaps(inputs.attenuationDb!, inputs.transitionCyclesPerSample!)).toBe(
      expected.scipyKaiserordTaps,
    );
    near(kaiserBeta(inputs.attenuationDb!), expected.scipyBeta!);
  });
  it.each(reference.cases.filter((c) => c.id.startsWith("atten")))("$id", ({ inputs, expected }) => {
    near(kaiserAttenuation(inputs.taps!, inputs.transitionCyclesPerSample!), expected.scipyKaiserAttenDb!);
  });
  it("the book's worked examples, to the digits printed", () => {
    expect(kaiserBeta(60)).toBeCloseTo(5.653, 3);
    expect(kaiserTaps(60, 0.1)).toBe(38);
    const attenuation = -20 * Math.log10(0.021);
    expect(attenuation).toBeCloseTo(33.56, 2);
    expect(kaiserBeta(attenuation)).toBeCloseTo(2.6, 1);
    expect(kaiserTaps(attenuation, 0.075)).toBe(25);
  });
});
