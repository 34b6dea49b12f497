/**
 * The shortest filter that keeps a specification, found by search and verified on the designed response.
 * References: J. F. Kaiser (1974), Proceedings of IEEE ISCAS, 20-23 (the estimate from which the search starts).
 */
import { DesignError } from "./design-error.ts";
import { kaiserBeta, kaiserTaps } from "./kaiser.ts";
import { lowestGain, peakGain } from "./response.ts";
import { designWindowedSinc, type FilterShape } from "./windowed-sinc.ts";

export interface Specification {
  readonly shape: FilterShape;
  /** Passband edges, cycles/sample: one for low- and high-pass, two for bands. */
  readonly pass: readonly number[];
  /** Stopband edges, likewise. */
  readonly stop: readonly number[];
  /** Largest |20 log10 gain| over the passband. */
  readonly ripple_dB: number;
  /** Least attenuation over the stopband. */
  readonly attenuation_dB: number;
  readonly method: "windowed-sinc" | "auto";
  readonly parity?: "odd" | "any";
}

export interface SpecifiedFilter {
  readonly taps: Float64Array;
  readonly method: "windowed-sinc";
  readonly window: "kaiser";
  readonly beta: number;
  readonly achieved: { readonly ripple_dB: number; readonly attenuation_dB: number };
  readonly why: string;
}

const MOST_TAPS = 20_001;
/** Extra attenuation for which beta is tried at each length: the formula for beta is itself an estimate. */
const TRIES_dB = [0, 0.4, 0.8, 1.4, 2.2];

/** @throws DesignError when no filter of at most 20,001 taps keeps the specification */
export function designBySpecification(spec: Specification): SpecifiedFilter {
  const width = transitionWidth(spec);
  const deviation = Math.min(10 ** (spec.ripple_dB / 20) - 1, 1 - 10 ** (-spec.ripple_dB / 20));
  const attenuation = Math.max(spec.attenuation_dB, -20 * Math.log10(deviation));
  const odd = spec.parity === "odd" || spec.shape === "high-pass" || spec.shape === "band-stop";
  const step = odd ? 2 : 1;
  const valid = (n: number) => (odd && n % 2 === 0 ? n + 1 : n);
  let n = valid(Math.max(3, kaiserTaps(Math.max(21, attenuation), width)));
  const tooLong = () =>
    new DesignError({
      problem: "no filter of a reasonable length keeps this specification",
      given: `a transition of ${width.toPrecision(3)} cycles/sample and ${attenuation.toFixed(1)} dB`,
      allowed: `at most ${MOST_TAPS} taps`,
      todo: "widen the transition between pass and stop, ask for less attenuation, or decimate first",
    });
  if (n > 2 * MOST_TAPS) throw tooLong();
  let found = attempt(spec, n, attenuation);
  while (found === null) {
    n += step;
    if (n > MOST_TAPS) throw tooLong();
    found = attempt(spec, n, attenuation);
  }
  for (let shorter = n - step; shorter >= 3; shorter -= step) {
    const better = attempt(spec, shorter, attenuation);
    if (better === null) break;
    found = better;
  }
  if (found.taps.length > MOST_TAPS) throw tooLong();
  return found;
}

/** The design of one length, if it keeps the specification. */
function attempt(spec: Specification, n: number, attenuation: number): SpecifiedFilter | null {
  const edges = spec.pass.map((p, i) => (p + spec.stop[i]!) / 2);
  for (const extra of TRIES_dB) {
    const beta = kaiserBeta(attenuation + extra);
    const taps = designWindowedSinc({ taps: n, shape: spec.shape, edges, window: "kaiser", beta });
    const achieved = achievedBy(taps, spec);
    if (achieved.ripple_dB <= spec.ripple_dB && achieved.attenuation_dB >= spec.attenuation_dB)
      return {
        taps,
        method: "windowed-sinc",
        window: "kaiser",
        beta,
        achieved,
        why: `windowed sinc with a Kaiser window (beta ${beta.toFixed(3)}): the shortest of this kind that keeps ${spec.ripple_dB} dB and ${spec.attenuation_dB} dB, verified on its response`,
      };
  }
  return null;
}

/** Ripple over the passband and attenuation over the stopband, on the response itself. */
export function achievedBy(
  taps: Float64Array,
  spec: Pick<Specification, "shape" | "pass" | "stop">,
): { ripple_dB: number; attenuation_dB: number } {
  const { pass, stop } = bandsOf(spec);
  let ripple = 0;
  let leak = 0;
  for (const [from, to] of stop) leak = Math.max(leak, peakGain(taps, from, to).gain);
  for (const [from, to] of pass) {
    ripple = Math.max(
      ripple,
      Math.abs(dB(peakGain(taps, from, to).gain)),
      Math.abs(dB(lowestGain(taps, from, to).gain)),
    );
  }
  return { ripple_dB: ripple, attenuation_dB: -dB(leak) };
}

const dB = (gain: number): number => 20 * Math.log10(Math.max(gain, 1e-20));

type Band = readonly [number, number];

function bandsOf(spec: Pick<Specification, "shape" | "pass" | "stop">): { pass: Band[]; stop: Band[] } {
  const [p0, p1] = spec.pass as [number, number];
  const [s0, s1] = spec.stop as [number, number];
  switch (spec.shape) {
    case "low-pass":
      return { pass: [[0, p0]], stop: [[s0, 0.5]] };
    case "high-pass":
      return { pass: [[p0, 0.5]], stop: [[0, s0]] };
    case "band-pass":
      return {
        pass: [[p0, p1]],
        stop: [
          [0, s0],
          [s1, 0.5],
        ],
      };
    case "band-stop":
      return {
        pass: [
          [0, p0],
          [p1, 0.5],
        ],
        stop: [[s0, s1]],
      };
  }
}

function transitionWidth(spec: Specification): number {
  return Math.min(...spec.pass.map((p, i) => Math.abs(p - spec.stop[i]!)));
}
