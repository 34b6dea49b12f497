/**
 * A specification as a mask over frequency: bands that must pass within limits, bands that must be stopped.
 * Frequencies in cycles/sample.
 */
import { DesignError } from "./design-error.ts";
import { GainCurve } from "./gain-curve.ts";
import type { FilterShape } from "./linear-phase.ts";

export interface MaskEdges {
  readonly shape: FilterShape;
  /** Passband edges: one for low- and high-pass, two rising for bands. */
  readonly pass: readonly number[];
  /** Stopband edges, likewise. */
  readonly stop: readonly number[];
}

export interface Mask extends MaskEdges {
  /** Largest |20 log10 gain| over the passband, > 0. */
  readonly ripple_dB: number;
  /** Least attenuation over the stopband, > 0. */
  readonly attenuation_dB: number;
}

export interface Achieved {
  readonly ripple_dB: number;
  readonly attenuation_dB: number;
}

export type Band = readonly [from: number, to: number];

/** The bands of each kind, rising. */
export function bandsOf({ shape, pass, stop }: MaskEdges): { pass: Band[]; stop: Band[] } {
  const [p0, p1] = pass as [number, number];
  const [s0, s1] = stop as [number, number];
  switch (shape) {
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

/** Narrowest transition between a passband and a stopband edge. */
export function transitionWidth({ pass, stop }: MaskEdges): number {
  return Math.min(...pass.map((p, i) => Math.abs(p - stop[i]!)));
}

/** Limits of the gain: passband between `lowest` and `highest`, stopband at most `leak`. */
export function limitsOf(mask: Mask): { lowest: number; highest: number; leak: number } {
  return {
    lowest: 10 ** (-mask.ripple_dB / 20),
    highest: 10 ** (mask.ripple_dB / 20),
    leak: 10 ** (-mask.attenuation_dB / 20),
  };
}

/** Ripple over the passband and attenuation over the stopband, on the response itself; 400 dB for nothing. */
export function achievedBy(taps: Float64Array, edges: MaskEdges): Achieved {
  const curve = new GainCurve(taps);
  const { pass, stop } = bandsOf(edges);
  const leak = Math.max(...stop.map(([from, to]) => curve.peak(from, to).gain));
  const ripple = Math.max(
    ...pass.flatMap(([from, to]) =>
      [curve.peak(from, to), curve.lowest(from, to)].map(({ gain }) => Math.abs(dB(gain))),
    ),
  );
  return { ripple_dB: ripple, attenuation_dB: -dB(leak) };
}

const dB = (gain: number): number => 20 * Math.log10(Math.max(gain, 1e-20));

export function keeps(achieved: Achieved, mask: Mask): boolean {
  return achieved.ripple_dB <= mask.ripple_dB && achieved.attenuation_dB >= mask.attenuation_dB;
}

/** @throws DesignError for edges that are out of range, out of order or too many, and for limits that are not > 0 */
export function refuseImpossibleMask(mask: Mask): void {
  const wanted = mask.shape === "low-pass" || mask.shape === "high-pass" ? 1 : 2;
  const counts = mask.pass.length === wanted && mask.stop.length === wanted;
  const { pass, stop } = bandsOf(mask);
  const edges = [...pass, ...stop].sort((a, b) => a[0] - b[0]).flat();
  const rising = edges.every((f, i) => f >= 0 && f <= 0.5 && (i === 0 || f > edges[i - 1]!));
  if (!counts || !rising)
    throw new DesignError({
      problem: `the edges of this ${mask.shape} filter do not make bands`,
      given: `pass ${mask.pass.join(", ")}; stop ${mask.stop.join(", ")} cycles/sample`,
      allowed: `${wanted === 1 ? "one edge" : "two edges"} each, inside 0 to 0.5, with a gap between pass and stop`,
      todo: "move the edges",
    });
  if (!(mask.ripple_dB > 0 && mask.ripple_dB < 40 && mask.attenuation_dB > 0 && mask.attenuation_dB <= 250))
    throw new DesignError({
      problem: "a filter needs a little ripple and a finite attenuation",
      given: `ripple ${mask.ripple_dB} dB, attenuation ${mask.attenuation_dB} dB`,
      allowed: "ripple above 0 and below 40 dB, attenuation above 0 and up to 250 dB",
      todo: "change the two limits",
    });
}
