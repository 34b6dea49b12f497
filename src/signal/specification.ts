/**
 * The shortest filter that keeps a specification, found by search and verified on the designed response.
 */
import { DesignError } from "./design-error.ts";
import { shortestKaiser } from "./kaiser-search.ts";
import { type Achieved, type Mask, refuseImpossibleMask, transitionWidth } from "./mask.ts";

export { achievedBy } from "./mask.ts";

export interface Specification extends Mask {
  readonly method: "windowed-sinc" | "auto";
  /** odd: odd lengths only, so that the delay is a whole number of samples. */
  readonly parity?: "odd" | "any";
}

export interface SpecifiedFilter {
  readonly taps: Float64Array;
  readonly method: "windowed-sinc";
  readonly window?: "kaiser";
  readonly beta?: number;
  readonly achieved: Achieved;
  /** One sentence. */
  readonly why: string;
}

const MOST_TAPS = 20_001;

/** @throws DesignError when no filter of at most 20,001 taps keeps the specification */
export function designBySpecification(spec: Specification): SpecifiedFilter {
  refuseImpossibleMask(spec);
  const odd = spec.parity === "odd" || spec.shape === "high-pass" || spec.shape === "band-stop";
  const found = shortestKaiser(spec, odd ? 2 : 1, MOST_TAPS);
  if (found === null)
    throw new DesignError({
      problem: "no filter of a reasonable length keeps this specification",
      given: `a transition of ${transitionWidth(spec).toPrecision(3)} cycles/sample, ripple ${spec.ripple_dB} dB and attenuation ${spec.attenuation_dB} dB`,
      allowed: `at most ${MOST_TAPS} taps`,
      todo: "widen the transition between pass and stop, ask for less attenuation, or decimate first",
    });
  return {
    ...found,
    method: "windowed-sinc",
    window: "kaiser",
    why: `windowed sinc with a Kaiser window (beta ${found.beta.toFixed(3)}): the shortest of this kind that keeps ${spec.ripple_dB} dB and ${spec.attenuation_dB} dB, verified on its response`,
  };
}
