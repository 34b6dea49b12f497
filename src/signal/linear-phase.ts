/**
 * The four types of linear-phase filter, by symmetry and parity of length, and what each can make.
 * References: L. R. Rabiner & B. Gold (1975), Theory and Application of Digital Signal Processing, section 3.3;
 * A. V. Oppenheim & R. W. Schafer, Discrete-Time Signal Processing, section 5.7.3 (recalled from memory).
 */
import { DesignError } from "./design-error.ts";
import { symmetryOf } from "./group-delay.ts";

export type FilterShape = "low-pass" | "high-pass" | "band-pass" | "band-stop";
export type LinearPhaseType = "I" | "II" | "III" | "IV";

export interface LinearPhase {
  readonly symmetry: "even" | "odd";
  readonly length: "odd" | "even";
  /** Frequencies in cycles/sample at which the symmetry forces the gain to zero. */
  readonly zeros: readonly number[];
  readonly makes: readonly FilterShape[];
}

export const LINEAR_PHASE: Record<LinearPhaseType, LinearPhase> = {
  I: {
    symmetry: "even",
    length: "odd",
    zeros: [],
    makes: ["low-pass", "high-pass", "band-pass", "band-stop"],
  },
  II: { symmetry: "even", length: "even", zeros: [0.5], makes: ["low-pass", "band-pass"] },
  III: { symmetry: "odd", length: "odd", zeros: [0, 0.5], makes: ["band-pass"] },
  IV: { symmetry: "odd", length: "even", zeros: [0], makes: ["high-pass", "band-pass"] },
};

/** The type of taps, or null when they have no symmetry and so no linear phase. */
export function linearPhaseType(taps: Float64Array): LinearPhaseType | null {
  const symmetry = symmetryOf(taps);
  if (symmetry === "none") return null;
  const odd = taps.length % 2 === 1;
  if (symmetry === "even") return odd ? "I" : "II";
  return odd ? "III" : "IV";
}

/** @throws DesignError when symmetric taps of this length cannot have the shape */
export function refuseLength(taps: number, shape: FilterShape): void {
  if (!(Number.isInteger(taps) && taps >= 1))
    throw new DesignError({
      problem: "a filter has a whole number of taps",
      given: `${taps} taps`,
      allowed: "1 or more",
      todo: "give a whole number",
    });
  const type = taps % 2 === 1 ? "I" : "II";
  if (!LINEAR_PHASE[type].makes.includes(shape))
    throw new DesignError({
      problem: `a symmetric ${shape} filter of even length is zero at the Nyquist frequency, where it should pass`,
      given: `${taps} taps`,
      allowed: "an odd number of taps",
      todo: `use ${taps + 1} taps`,
    });
}

/** Taps after which the rotation is renewed, so that its error stays below 1e-14. */
const RENEWED_EVERY = 64;

/**
 * Signed amplitude A(f) of symmetric taps, H(f) = A(f) e^(-i pi f (N - 1)): negative where a tone is inverted.
 * Half the work of the response. Only the first half of the taps is read.
 * @param f  cycles/sample, 0 to 0.5
 */
export function amplitudeAt(taps: Float64Array, f: number): number {
  const n = taps.length;
  const half = Math.floor(n / 2);
  let sum = n % 2 === 1 ? taps[half]! / 2 : 0;
  const stepRe = Math.cos(2 * Math.PI * f);
  const stepIm = -Math.sin(2 * Math.PI * f);
  let a = 1;
  let b = 0;
  for (let i = 0; i < half; i++) {
    if (i % RENEWED_EVERY === 0) {
      const turn = 2 * Math.PI * ((f * ((n - 1) / 2 - i)) % 1);
      a = Math.cos(turn);
      b = Math.sin(turn);
    }
    sum += taps[i]! * a;
    const next = a * stepRe - b * stepIm;
    b = a * stepIm + b * stepRe;
    a = next;
  }
  return 2 * sum;
}
