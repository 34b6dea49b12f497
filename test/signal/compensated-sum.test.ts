import { describe, expect, it } from "vitest";
import { CompensatedSum } from "../../src/signal/compensated-sum.ts";

const sumOf = (list: number[]) => {
  const sum = new CompensatedSum();
  for (const x of list) sum.add(x);
  return sum.total;
};

describe("compensated sum", () => {
  it("keeps the small term that a large one hides (Neumaier's own case)", () => {
    expect(1 + 1e100 + 1 - 1e100).toBe(0);
    expect(sumOf([1, 1e100, 1, -1e100])).toBe(2);
  });
  it("adds a tenth ten million times to the last digit", () => {
    const sum = new CompensatedSum();
    for (let i = 0; i < 1e7; i++) sum.add(0.1);
    // 1e7 times the double nearest to 0.1 is 1000000.0000000000555…, whose nearest double is 1e6.
    expect(sum.total).toBe(1e6);
  });
  it("passes infinities and NaN on as plain addition does", () => {
    expect(sumOf([1, Number.POSITIVE_INFINITY, 2])).toBe(Number.POSITIVE_INFINITY);
    expect(sumOf([Number.POSITIVE_INFINITY, Number.NEGATIVE_INFINITY])).toBeNaN();
    expect(sumOf([1, Number.NaN])).toBeNaN();
    expect(sumOf([])).toBe(0);
  });
});
