/**
 * Windowed-sinc design: the ideal impulse response cut to length by a window.
 * References: A. V. Oppenheim & R. W. Schafer, Discrete-Time Signal Processing, section 7.5 "Design of FIR
 * filters by windowing" (2nd ed. 7.2; recalled from memory).
 */
import { DesignError } from "./design-error.ts";
import { gainAt } from "./frequency-response.ts";
import { type FilterShape, refuseLength } from "./linear-phase.ts";
import { type WindowKind, windowCoefficients } from "./windows.ts";

export type { FilterShape } from "./linear-phase.ts";

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
 * @throws DesignError for edges out of range, for an even length that the shape cannot have, and for a window
 *   so short that nothing passes
 */
export function designWindowedSinc(design: WindowedSinc): Float64Array {
  const { taps: n, shape, edges, window } = design;
  refuseImpossible(design);
  const h = new Float64Array(n);
  const w = windowCoefficients(window, n, "symmetric", design.beta);
  for (let i = 0; 2 * i < n; i++) {
    h[i] = ideal(shape, edges, (n - 1) / 2 - i) * w[i]!;
    h[n - 1 - i] = h[i]!;
  }
  const at = shape === "high-pass" ? 0.5 : shape === "band-pass" ? (edges[0]! + edges[1]!) / 2 : 0;
  const gain = gainAt(h, at);
  // Windows with zero end points leave nothing of two taps; very short band-passes may cancel at their centre.
  if (!(gain > 1e-9))
    throw new DesignError({
      problem: `a ${shape} filter of this length and window passes nothing where it should`,
      given: `${n} taps, window ${window}`,
      allowed: "a length at which the window leaves some taps",
      todo: "use more taps",
    });
  for (let i = 0; i < n; i++) h[i]! /= gain;
  return h;
}

/** The ideal filter's impulse response, m samples from its centre. */
function ideal(shape: FilterShape, edges: readonly number[], m: number): number {
  const below = (f: number) => (m === 0 ? 2 * f : Math.sin(2 * Math.PI * f * m) / (Math.PI * m));
  const all = m === 0 ? 1 : 0;
  switch (shape) {
    case "low-pass":
      return below(edges[0]!);
    case "high-pass":
      return all - below(edges[0]!);
    case "band-pass":
      return below(edges[1]!) - below(edges[0]!);
    case "band-stop":
      return all - (below(edges[1]!) - below(edges[0]!));
  }
}

function refuseImpossible({ taps, shape, edges }: WindowedSinc): void {
  refuseLength(taps, shape);
  const wanted = shape === "low-pass" || shape === "high-pass" ? 1 : 2;
  const rising = edges.every((f, i) => f > (i === 0 ? 0 : edges[i - 1]!) && f < 0.5);
  if (edges.length !== wanted || !rising)
    throw new DesignError({
      problem: `a ${shape} filter has ${wanted === 1 ? "one edge" : "two rising edges"} between 0 and the Nyquist frequency`,
      given: `${edges.join(", ")} cycles/sample`,
      allowed: "above 0 and below 0.5 cycles/sample",
      todo: "move the edges",
    });
}
