/**
 * Windowed-sinc design: the ideal impulse response cut to length by a window.
 * References: A. V. Oppenheim & R. W. Schafer, Discrete-Time Signal Processing, section 7.5 "Design of FIR
 * filters by windowing" (2nd ed. 7.2; recalled from memory).
 */
import { DesignError } from "./design-error.ts";
import { responseAt } from "./response.ts";
import { type WindowKind, windowCoefficients } from "./windows.ts";

export type FilterShape = "low-pass" | "high-pass" | "band-pass" | "band-stop";

export interface WindowedSinc {
  /** At least 1. */
  readonly taps: number;
  readonly shape: FilterShape;
  /** The -6 dB edges, cycles/sample, rising, inside (0, 0.5): one for low- and high-pass, two for bands. */
  readonly edges: readonly number[];
  readonly window: WindowKind;
  readonly beta?: number;
}

/**
 * Symmetric taps. The gain is 1 at zero frequency (low-pass, band-stop), at the Nyquist frequency (high-pass)
 * or at the band's centre (band-pass).
 * @throws DesignError for an even length that the shape cannot have
 */
export function designWindowedSinc(design: WindowedSinc): Float64Array {
  const { taps: n, shape, edges, window } = design;
  if (n % 2 === 0 && (shape === "high-pass" || shape === "band-stop"))
    throw new DesignError({
      problem: `a symmetric ${shape} filter of even length is zero at the Nyquist frequency, where it should pass`,
      given: `${n} taps`,
      allowed: "an odd number of taps",
      todo: `use ${n + 1} taps`,
    });
  const h = new Float64Array(n);
  const w = windowCoefficients(window, n, "symmetric", design.beta);
  const low = (f: number, m: number) => (m === 0 ? 2 * f : Math.sin(2 * Math.PI * f * m) / (Math.PI * m));
  const ideal = (m: number): number => {
    const delta = m === 0 ? 1 : 0;
    switch (shape) {
      case "low-pass":
        return low(edges[0]!, m);
      case "high-pass":
        return delta - low(edges[0]!, m);
      case "band-pass":
        return low(edges[1]!, m) - low(edges[0]!, m);
      case "band-stop":
        return delta - (low(edges[1]!, m) - low(edges[0]!, m));
    }
  };
  for (let i = 0; 2 * i < n; i++) {
    const m = (n - 1) / 2 - i;
    h[i] = ideal(m) * w[i]!;
    h[n - 1 - i] = h[i]!;
  }
  const at = shape === "high-pass" ? 0.5 : shape === "band-pass" ? (edges[0]! + edges[1]!) / 2 : 0;
  const { re, im } = responseAt(h, at);
  const gain = Math.hypot(re, im);
  for (let i = 0; i < n; i++) h[i]! /= gain;
  return h;
}
