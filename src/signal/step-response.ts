/** The answer of a filter to a sudden step: the running sum of its taps. */

export interface StepResponse {
  /** Samples from 10 % to 90 % of the final value, on the straight line between samples; null when it is 0. */
  readonly rise_10_90: number | null;
  /** Largest value above the final one, as a share of it. */
  readonly overshoot: number;
}

/**
 * Final value, as a share of sum |h|, below which a step is taken not to pass: a high-pass of 60 dB leaves a
 * thousandth of it, and an overshoot in shares of that would say nothing. Low-pass taps have 0.2 and more.
 */
const NOTHING = 0.05;

export function stepResponse(taps: Float64Array): StepResponse {
  const final = taps.reduce((sum, w) => sum + w, 0);
  const size = taps.reduce((sum, w) => sum + Math.abs(w), 0);
  if (Math.abs(final) <= NOTHING * size) return { rise_10_90: null, overshoot: 0 };
  let sum = 0;
  let highest = 0;
  let low: number | null = null;
  let high: number | null = null;
  for (let n = 0; n < taps.length; n++) {
    const before = sum / final;
    sum += taps[n]!;
    const now = sum / final;
    // The last crossing of 10 % before the first of 90 %: what comes earlier is ringing.
    if (high === null && before < 0.1 && now >= 0.1) low = n - 1 + (0.1 - before) / (now - before);
    if (high === null && before < 0.9 && now >= 0.9) high = n - 1 + (0.9 - before) / (now - before);
    highest = Math.max(highest, now);
  }
  return {
    rise_10_90: low === null || high === null ? null : high - low,
    // The last sum is the final value but for the order of rounding.
    overshoot: highest - 1 > 1e-12 ? highest - 1 : 0,
  };
}
