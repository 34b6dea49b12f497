/**
 * The shortest filter that keeps a specification, found by search and verified on the designed response, never taken
 * from an estimate.
 */
import { DesignError } from "./design-error.ts";
import { MOST_EQUIRIPPLE_TAPS } from "./equiripple.ts";
import { type MaskFilter, shortestEquiripple } from "./equiripple-search.ts";
import { type KaiserFilter, shortestKaiser } from "./kaiser-search.ts";
import { shortestLeastSquares } from "./least-squares-search.ts";
import {
  type Achieved,
  achievedBy,
  keeps,
  limitsOf,
  type Mask,
  refuseImpossibleMask,
  transitionWidth,
} from "./mask.ts";
import { gainAt, peakGain } from "./response.ts";
import type { Lengths } from "./shortest-length.ts";

export { achievedBy } from "./mask.ts";

export type SpecifiedMethod = "windowed-sinc" | "equiripple" | "least-squares";

export interface Specification extends Mask {
  /** auto takes the shortest that has no peak between its bands. */
  readonly method: SpecifiedMethod | "auto";
  /** odd: odd lengths only, so that the delay is a whole number of samples. */
  readonly parity?: "odd" | "any";
}

export interface SpecifiedFilter {
  /** Exactly symmetric. */
  readonly taps: Float64Array;
  readonly method: SpecifiedMethod;
  readonly window?: "kaiser";
  readonly beta?: number;
  readonly achieved: Achieved;
  /** Largest gain anywhere, the transitions included. */
  readonly largestGain: number;
  /** One sentence. */
  readonly why: string;
  /** One sentence, when the gain between the bands rises well above the passband's. */
  readonly warning?: string;
}

/** Most taps of each method: beyond, a design takes many seconds. */
const MOST_TAPS: Record<SpecifiedMethod, number> = {
  "windowed-sinc": 20_001,
  equiripple: MOST_EQUIRIPPLE_TAPS,
  "least-squares": 1001,
};

/** Gain between the bands, in dB above the passband's limit, that is worth a warning, and that auto does not take. */
const WORTH_A_WARNING_dB = 1;
const TOO_MUCH_dB = 3;

/**
 * The minimum number of taps of the method: for equiripple proved by monotony; for the others every length tried down
 * to where four in a row fail.
 * @throws DesignError for impossible edges or limits, and when no filter within the method's length keeps them:
 *   20,001 taps for windowed sinc, 2001 for equiripple, 1001 for least squares
 */
export function designBySpecification(spec: Specification): SpecifiedFilter {
  refuseImpossibleMask(spec);
  const lengths =
    spec.parity === "odd" || spec.shape === "high-pass" || spec.shape === "band-stop" ? "odd" : "any";
  const kept = `${short(spec.ripple_dB)} dB of ripple and ${short(spec.attenuation_dB)} dB of attenuation`;
  switch (spec.method) {
    case "windowed-sinc": {
      const found = needed(shortestKaiser(spec, lengths, MOST_TAPS["windowed-sinc"]), spec, "windowed-sinc");
      const why = `windowed sinc with a Kaiser window (beta ${found.beta.toFixed(3)}): the shortest of this kind that keeps ${kept}, verified on its response`;
      return described(spec, found, "windowed-sinc", why);
    }
    case "equiripple": {
      const found = needed(shortestEquiripple(spec, lengths, MOST_TAPS.equiripple), spec, "equiripple");
      const why = `equiripple: no linear-phase filter ${lengths === "odd" ? "of odd length " : ""}with fewer taps keeps ${kept}`;
      return described(spec, found, "equiripple", why);
    }
    case "least-squares": {
      const found = needed(
        shortestLeastSquares(spec, lengths, MOST_TAPS["least-squares"]),
        spec,
        "least-squares",
      );
      const why = `least squares, its bands weighed against each other: the shortest of this kind that keeps ${kept}, verified on its response`;
      return described(spec, found, "least-squares", why);
    }
    case "auto":
      return shortestOfAll(spec, lengths, kept);
  }
}

/** Least squares is left out: on the same mask it cannot be shorter than equiripple. */
function shortestOfAll(spec: Specification, lengths: Lengths, kept: string): SpecifiedFilter {
  const kaiser = shortestKaiser(spec, lengths, MOST_TAPS["windowed-sinc"]);
  const free = unbiasedEquiripple(spec, lengths);
  const peaked = free !== null && excess_dB(spec, free.taps) > TOO_MUCH_dB;
  // A wide transition in which the gain runs free is narrowed to the width of the other.
  const calm = peaked ? unbiasedEquiripple(evenTransitions(spec), lengths) : free;
  const equiripple = calm !== null && excess_dB(spec, calm.taps) <= TOO_MUCH_dB ? calm : null;
  const aside =
    peaked && free !== null
      ? `; ${free.taps.length} taps would do if the gain between the bands might rise ${excess_dB(spec, free.taps).toFixed(0)} dB above the passband`
      : "";
  if (equiripple !== null && (kaiser === null || equiripple.taps.length < kaiser.taps.length)) {
    const other =
      kaiser === null ? "no Kaiser window keeps it at all" : `a Kaiser window needs ${kaiser.taps.length}`;
    const why = `equiripple with its gain set to exactly 1, the shortest: ${equiripple.taps.length} taps keep ${kept}, ${other}${aside}`;
    return described(spec, equiripple, "equiripple", why);
  }
  const found = needed(kaiser, spec, "windowed-sinc");
  const reason =
    free === null
      ? `no equiripple filter of up to ${MOST_TAPS.equiripple} taps keeps it`
      : equiripple === null
        ? "equiripple would raise what lies between the bands"
        : "equiripple is no shorter";
  const why = `windowed sinc with a Kaiser window (beta ${found.beta.toFixed(3)}): ${found.taps.length} taps keep ${kept}; ${reason}${aside}`;
  return described(spec, found, "windowed-sinc", why);
}

/**
 * The equiripple criterion leaves the gain at zero anywhere within the ripple, which would shift a steady level by
 * that much. Half the ripple is asked for, and the taps are scaled to a gain of 1 at zero (high-pass: at Nyquist;
 * band-pass: at the band's centre); the whole ripple then holds, and is verified.
 */
function unbiasedEquiripple(spec: Mask, lengths: Lengths): MaskFilter | null {
  const half = spec.ripple_dB / 2;
  const tighter = { ...spec, ripple_dB: half, attenuation_dB: spec.attenuation_dB + half };
  const found = shortestEquiripple(tighter, lengths, MOST_TAPS.equiripple);
  if (found === null) return null;
  const [low, high] = spec.pass as [number, number];
  const at = spec.shape === "high-pass" ? 0.5 : spec.shape === "band-pass" ? (low + high) / 2 : 0;
  const gain = gainAt(found.taps, at);
  const taps = found.taps.map((w) => w / gain);
  const achieved = achievedBy(taps, spec);
  return keeps(achieved, spec)
    ? { taps, achieved, largestDontCareGain: found.largestDontCareGain / gain }
    : null;
}

function described(
  spec: Specification,
  found: KaiserFilter | MaskFilter,
  method: SpecifiedMethod,
  why: string,
): SpecifiedFilter {
  const { taps, achieved } = found;
  const above = excess_dB(spec, taps);
  return {
    taps,
    method,
    ...("beta" in found ? { window: "kaiser", beta: found.beta } : {}),
    achieved,
    largestGain: peakGain(taps, 0, 0.5).gain,
    why,
    ...(above > WORTH_A_WARNING_dB
      ? {
          warning: `between its bands the gain rises ${above.toFixed(1)} dB above the passband: make the wide transition as narrow as the other, or take method auto`,
        }
      : {}),
  };
}

/** How far the largest gain stands above the passband's upper limit. */
function excess_dB(mask: Mask, taps: Float64Array): number {
  return 20 * Math.log10(peakGain(taps, 0, 0.5).gain / limitsOf(mask).highest);
}

/** The stopband edges moved to the narrowest transition's distance from their passband edges. */
function evenTransitions(mask: Mask): Mask {
  const width = transitionWidth(mask);
  return { ...mask, stop: mask.pass.map((p, i) => p + Math.sign(mask.stop[i]! - p) * width) };
}

const short = (x: number): number => Number(x.toPrecision(4));

function needed<T>(found: T | null, spec: Specification, method: SpecifiedMethod): T {
  if (found !== null) return found;
  throw new DesignError({
    problem: `no ${method} filter of a reasonable length keeps this specification`,
    given: `a transition of ${transitionWidth(spec).toPrecision(3)} cycles/sample, ripple ${spec.ripple_dB} dB and attenuation ${spec.attenuation_dB} dB`,
    allowed: `at most ${MOST_TAPS[method]} taps`,
    todo:
      method === "windowed-sinc"
        ? "widen the transition between pass and stop, ask for less attenuation, or decimate first"
        : "widen the transition between pass and stop, ask for less attenuation, decimate first, or set method: windowed-sinc",
  });
}
