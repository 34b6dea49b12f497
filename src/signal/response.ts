/** What a filter of given taps does to frequencies, steps and time. Frequencies in cycles/sample, 0 to 0.5. */
import { peakGain } from "./gain-curve.ts";

export { type EdgeFrequencies, edgeFrequencies } from "./edge-frequencies.ts";
export { gainAt, responseAt } from "./frequency-response.ts";
export { GainCurve, type GainPoint, lowestGain, peakGain } from "./gain-curve.ts";
export { type GroupDelay, groupDelayAt, groupDelayOf, symmetryOf } from "./group-delay.ts";
export { type StepResponse, stepResponse } from "./step-response.ts";

/** One-sided equivalent noise bandwidth, cycles/sample: sum h^2 / (2 peak^2), by Parseval's theorem. */
export function noiseBandwidth(taps: Float64Array): number {
  const peak = peakGain(taps, 0, 0.5).gain;
  return taps.reduce((sum, w) => sum + w * w, 0) / (2 * peak * peak);
}
