import { describe, expect, it } from "vitest";
import { adviseOnMeans } from "../../src/report/adviser.ts";
import { planOf } from "../engine/harness.ts";

describe("advice on moving averages", () => {
  const advice = (points: number) =>
    adviseOnMeans(
      planOf([
        { stage: "resample", interval: "1 s" },
        { stage: "moving-average", points },
      ]),
    )[0]!;

  it("names the first side lobe, -13.3 dB for long means (common practice), and the turned bands", () => {
    const a = advice(61);
    expect(a.remarks[0]).toContain("-13.3 dB");
    expect(a.remarks[1]).toContain("Between 0.01639 and 0.03279 Hz");
    expect(a.mean.sideLobe_dB).toBeCloseTo(-13.26, 1);
  });

  it("names a filter of the same noise bandwidth with lower side lobes, and one of the same delay", () => {
    for (const n of [9, 61, 301]) {
      const a = advice(n);
      expect(Math.abs(a.sameNoise.noiseBandwidth_Hz / a.mean.noiseBandwidth_Hz - 1)).toBeLessThan(0.01);
      expect(a.sameNoise.sideLobe_dB).toBeLessThan(-45);
      expect(a.sameDelay.delay_s).toBe(a.mean.delay_s);
      expect(a.sameDelay.sideLobe_dB).toBeLessThan(a.mean.sideLobe_dB - 10);
    }
  });

  it("says that an even centred mean stands half a sample off the grid", () => {
    expect(advice(60).remarks.join(" ")).toContain("61 points would not");
    expect(advice(61).remarks.join(" ")).not.toContain("off the grid");
  });
});
