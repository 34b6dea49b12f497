import { describe, expect, it } from "vitest";
import { thirdOctaves } from "../../src/signal/third-octaves.ts";

describe("one-third octaves, IEC 61260-1:2014", () => {
  it("have the exact base-ten centres, and limits that touch", () => {
    // Exact mid-band frequencies of the standard's table (recalled from memory), five digits.
    const bands = thirdOctaves(80, 1300);
    const centres = bands.map((b) => Number(b.centre_Hz.toPrecision(5)));
    expect(centres).toEqual([
      100, 125.89, 158.49, 199.53, 251.19, 316.23, 398.11, 501.19, 630.96, 794.33, 1000,
    ]);
    bands.slice(1).forEach((b, i) => expect(b.from_Hz).toBeCloseTo(bands[i]!.to_Hz, 9));
    expect(bands.at(-1)!.from_Hz).toBeCloseTo(891.251, 3);
    expect(bands.at(-1)!.to_Hz).toBeCloseTo(1122.018, 3);
  });
  it("leave out what reaches beyond the limits", () => {
    expect(thirdOctaves(90, 112).length).toBe(0);
    expect(thirdOctaves(0.0089, 0.0113).length).toBe(1);
  });
});
