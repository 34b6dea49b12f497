import { expect } from "vitest";
import type { FilterShape } from "../../src/signal/linear-phase.ts";
import { bandsOf, type Mask } from "../../src/signal/mask.ts";
import { gainAt, symmetryOf } from "../../src/signal/response.ts";
import {
  designBySpecification,
  type Specification,
  type SpecifiedFilter,
} from "../../src/signal/specification.ts";

export const shapes: readonly FilterShape[] = ["low-pass", "high-pass", "band-pass", "band-stop"];

/** Numbers in (0, 1) from a seed: the linear congruential generator of Park & Miller (1988), 16807 mod 2^31 - 1. */
export function uniform(seed: number): () => number {
  let state = (seed % 2147483646) + 1;
  return () => {
    state = (state * 16807) % 2147483647;
    return state / 2147483647;
  };
}

/** A specification that some dozens of taps can keep. */
export function randomMask(shape: FilterShape, seed: number): Mask {
  const next = uniform(seed * 7919 + shape.length);
  for (let i = 0; i < 5; i++) next();
  const width = 0.025 + 0.08 * next();
  const other = width * (1 + 0.5 * next());
  const a = 0.03 + 0.12 * next();
  const b = a + width + 0.04 + 0.06 * next();
  const ripple_dB = 10 ** (-2.5 + 2.3 * next());
  const attenuation_dB = 18 + 62 * next();
  const bands = {
    "low-pass": { pass: [a], stop: [a + width] },
    "high-pass": { pass: [a + width], stop: [a] },
    "band-pass": { pass: [a + width, b + width], stop: [a, b + width + other] },
    "band-stop": { pass: [a, b + width + other], stop: [a + width, b + width] },
  }[shape];
  return { shape, ...bands, ripple_dB, attenuation_dB };
}

/** Worst of a mask on a plain grid of 16 points a tap and band, end points included. */
export function onDenseGrid(taps: Float64Array, mask: Mask): { ripple_dB: number; attenuation_dB: number } {
  const { pass, stop } = bandsOf(mask);
  const gains = ([from, to]: readonly [number, number]) => {
    const points = Math.max(8, Math.ceil(16 * taps.length * (to - from) * 2));
    return Array.from({ length: points + 1 }, (_, i) => gainAt(taps, from + ((to - from) * i) / points));
  };
  const dB = (g: number) => 20 * Math.log10(Math.max(g, 1e-20));
  return {
    ripple_dB: Math.max(...pass.flatMap(gains).map((g) => Math.abs(dB(g)))),
    attenuation_dB: -dB(Math.max(...stop.flatMap(gains))),
  };
}

/** The filter of a method, seen on a plain grid of 16 points a tap to keep its mask as it says. */
export function kept(
  mask: Mask,
  method: Specification["method"],
  parity: "odd" | "any" = "any",
): SpecifiedFilter {
  const made = designBySpecification({ ...mask, method, parity });
  expect(symmetryOf(made.taps)).toBe("even");
  const seen = onDenseGrid(made.taps, mask);
  expect(seen.ripple_dB).toBeLessThanOrEqual(mask.ripple_dB);
  expect(seen.attenuation_dB).toBeGreaterThanOrEqual(mask.attenuation_dB);
  // What is said to be achieved is what is seen, up to what lies between the points of the grid.
  expect(made.achieved.ripple_dB).toBeGreaterThanOrEqual(seen.ripple_dB - 1e-9);
  expect(made.achieved.ripple_dB).toBeLessThanOrEqual(mask.ripple_dB);
  expect(made.achieved.attenuation_dB).toBeLessThanOrEqual(seen.attenuation_dB + 1e-9);
  expect(made.achieved.attenuation_dB).toBeGreaterThanOrEqual(mask.attenuation_dB);
  expect(made.largestGain).toBeGreaterThanOrEqual(gainAt(made.taps, mask.pass[0]!) - 1e-12);
  expect(made.why).toMatch(/^[^\n]+[^.]$/);
  return made;
}
