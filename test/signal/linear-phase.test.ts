import { describe, expect, it } from "vitest";
import { DesignError } from "../../src/signal/design-error.ts";
import {
  amplitudeAt,
  type FilterShape,
  LINEAR_PHASE,
  linearPhaseType,
  refuseLength,
} from "../../src/signal/linear-phase.ts";
import { gainAt, responseAt } from "../../src/signal/response.ts";
import { shapes, uniform } from "./masks.ts";

describe("linear-phase types", () => {
  it("are told from the taps, and their forced zeros are there", () => {
    const next = uniform(3);
    for (let n = 2; n <= 41; n++)
      for (const sign of [1, -1]) {
        const taps = new Float64Array(n);
        for (let i = 0; 2 * i < n; i++) {
          taps[i] = next() - 0.5;
          taps[n - 1 - i] = sign * taps[i]!;
        }
        if (sign < 0 && n % 2 === 1) taps[(n - 1) / 2] = 0;
        const type = linearPhaseType(taps)!;
        expect(type).toBe(sign > 0 ? (n % 2 === 1 ? "I" : "II") : n % 2 === 1 ? "III" : "IV");
        for (const f of LINEAR_PHASE[type].zeros) expect(gainAt(taps, f)).toBeLessThan(1e-13);
      }
    expect(linearPhaseType(Float64Array.of(1, 2, 3))).toBeNull();
  });

  it("amplitude is the response with its delay taken out, and signed", () => {
    const next = uniform(8);
    for (const n of [1, 2, 5, 64, 129, 1000]) {
      const taps = new Float64Array(n);
      for (let i = 0; 2 * i < n; i++) taps[n - 1 - i] = taps[i] = next() - 0.5;
      for (const f of [0, 0.013, 0.25, 0.3333, 0.5]) {
        const { re, im } = responseAt(taps, f);
        const turn = Math.PI * f * (n - 1);
        expect(amplitudeAt(taps, f)).toBeCloseTo(re * Math.cos(turn) - im * Math.sin(turn), 11);
      }
    }
    expect(amplitudeAt(Float64Array.of(0.25, 0.25, 0.25, 0.25), 0.45)).toBeCloseTo(-0.148778017349658, 12);
  });

  it("refuse the shapes that they cannot make", () => {
    const refused = (n: number, shape: FilterShape) => {
      try {
        refuseLength(n, shape);
        return false;
      } catch (error) {
        expect(error).toBeInstanceOf(DesignError);
        return true;
      }
    };
    for (const shape of shapes) {
      expect(refused(31, shape)).toBe(false);
      expect(refused(32, shape)).toBe(shape === "high-pass" || shape === "band-stop");
      expect(refused(0, shape)).toBe(true);
    }
  });
});
