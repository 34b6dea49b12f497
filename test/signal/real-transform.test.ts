import { describe, expect, it } from "vitest";
import { RealTransform } from "../../src/signal/real-transform.ts";
import { nearGaussian } from "./noise.ts";

/** The definition, with the angle reduced exactly. */
function naive(x: Float64Array): { re: Float64Array; im: Float64Array } {
  const n = x.length;
  const bins = Math.floor(n / 2) + 1;
  const re = new Float64Array(bins);
  const im = new Float64Array(bins);
  for (let k = 0; k < bins; k++)
    for (let i = 0; i < n; i++) {
      const angle = (2 * Math.PI * ((k * i) % n)) / n;
      re[k]! += x[i]! * Math.cos(angle);
      im[k]! -= x[i]! * Math.sin(angle);
    }
  return { re, im };
}

const norm = (x: Float64Array) => Math.hypot(...x);
const largest = (a: Float64Array, b: Float64Array) =>
  a.reduce((m, v, i) => Math.max(m, Math.abs(v - b[i]!)), 0);
const sizes = [1, 2, 3, 4, 5, 7, 8, 15, 16, 32, 97, 100, 101, 128, 243, 256, 360, 512, 1000, 1024];

describe.each(sizes)("real transform of %i samples", (size) => {
  const a = nearGaussian(1234567890, size);
  const b = nearGaussian(42, size);
  const plan = new RealTransform(size);
  const room = () => new Float64Array(plan.bins);
  const [re, im, reA, imA, reB, imB] = [room(), room(), room(), room(), room(), room()];

  it("equals the definition", () => {
    plan.transform(a, re, im);
    const exact = naive(a);
    const scale = 2e-14 * norm(a) * Math.sqrt(size);
    expect(largest(re, exact.re)).toBeLessThan(scale);
    expect(largest(im, exact.im)).toBeLessThan(scale);
    expect(Object.is(im[0], 0)).toBe(true);
    if (size % 2 === 0) expect(Object.is(im[size / 2], 0)).toBe(true);
  });

  it("two at a time equals one at a time, within the rounding of the larger", () => {
    for (const factor of [1, 1e6]) {
      const large = b.map((v) => factor * v);
      plan.transformPair(a, large, reA, imA, reB, imB);
      const limit = 1e-14 * norm(large) + 1e-14 * norm(a);
      plan.transform(a, re, im);
      expect(largest(re, reA)).toBeLessThan(limit);
      expect(largest(im, imA)).toBeLessThan(limit);
      plan.transform(large, re, im);
      expect(largest(re, reB)).toBeLessThan(limit);
      expect(largest(im, imB)).toBeLessThan(limit);
    }
  });

  it("leaves its input alone and repeats itself bit for bit", () => {
    const copy = Float64Array.from(a);
    plan.transform(a, re, im);
    plan.transform(b, reA, imA);
    plan.transform(a, reA, imA);
    expect(a).toEqual(copy);
    expect(reA).toEqual(re);
    expect(imA).toEqual(im);
  });
});

describe("real transform", () => {
  it("refuses a size that is no count", () => {
    for (const size of [0, -4, 2.5, Number.NaN]) expect(() => new RealTransform(size)).toThrow(RangeError);
  });
});
