/** Extremes of a chain's gain over a band against the closed form of the mean, and against dense direct sums. */
import { describe, expect, it } from "vitest";
import { chainExtremes, stageGain } from "../../src/report/chain-response.ts";
import { intervalSeconds } from "../../src/signal/grid.ts";
import { gainAt } from "../../src/signal/response.ts";
import { gainsOnLine } from "../../src/signal/response-on-line.ts";
import { planOf } from "../engine/harness.ts";

const GRID = { stage: "resample", interval: "1 s" };

describe("extremes of a chain's gain", () => {
  it("a mean of 1280 from 0.1 Hz up: the lobe, though 0.1 + 0.4 k / 512 Hz are nulls throughout", () => {
    const plan = planOf([GRID, { stage: "moving-average", points: 1280, reach: "past-only" }]);
    const { highest } = chainExtremes(plan, 0, 0.1, 0.5);
    // First crest of |sin(pi f N)| from 0.1 Hz on, f = (128 + 1/2) / 1280; the crest lies a shade below it.
    const crest = 1 / (1280 * Math.sin((Math.PI * 128.5) / 1280));
    expect(highest).toBeGreaterThanOrEqual(crest);
    expect(highest).toBeLessThan(crest * 1.0001);
  });

  it("a chain of two rates: not below a dense look, and not above it by more than the look can miss", () => {
    const plan = planOf([
      GRID,
      { stage: "decimate", by: 10 },
      { stage: "fir", shape: "low-pass", pass: "6 mHz", stop: "12 mHz" },
      { stage: "moving-average", points: 5 },
    ]);
    for (const [from, to] of [
      [0, 0.005],
      [0.012, 0.05],
      [0.03, 0.5],
    ] as const) {
      const { highest, lowest } = chainExtremes(plan, 0, from, to);
      let top = 0;
      let bottom = Number.POSITIVE_INFINITY;
      // Above 50 mHz only the first filter counts, so the gain jumps there: look on both sides of it.
      const looks = Float64Array.from({ length: 20_001 }, (_, i) => from + ((to - from) * i) / 20_000);
      for (const f of to > 0.05 ? [...looks, 0.05 * (1 + 1e-12)] : looks) {
        let gain = 1;
        for (const s of plan.stages) {
          const at = f * intervalSeconds(s.signalIn.grid!);
          if (at <= 0.5) gain *= stageGain(s, at);
        }
        top = Math.max(top, gain);
        bottom = Math.min(bottom, gain);
      }
      expect(highest).toBeGreaterThanOrEqual(top * (1 - 1e-9));
      expect(highest).toBeLessThanOrEqual(top * 1.001);
      expect(lowest).toBeLessThanOrEqual(bottom + 1e-9);
    }
  });

  it("gains on a line of frequencies are those of the direct sum", () => {
    const taps = Float64Array.from({ length: 301 }, (_, n) => Math.sin(n * n * 0.37) + 0.2);
    const gains = gainsOnLine(taps, 0.0137, 3.1e-4, 700);
    gains.forEach((g, m) => {
      expect(Math.abs(g - gainAt(taps, 0.0137 + 3.1e-4 * m))).toBeLessThan(1e-9);
    });
  });
});
