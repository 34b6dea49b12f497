/**
 * The Kaiser window's parameter and length.
 * References: J. F. Kaiser (1974), "Nonrecursive digital filter design using the I0-sinh window function",
 * Proceedings of IEEE ISCAS, 20-23: beta(A), and taps from A and the transition width with the constant 7.95.
 */

/** Modified Bessel function of the first kind, order 0, by its power series; relative error a few ulp for x <= 700. */
export function besselI0(x: number): number {
  const q = (x * x) / 4;
  let term = 1;
  let sum = 1;
  for (let k = 1; term > sum * 1e-18; k++) {
    term *= q / (k * k);
    sum += term;
  }
  return sum;
}

/** beta for a stopband attenuation in dB; 0 below 21 dB. */
export function kaiserBeta(attenuation_dB: number): number {
  const a = attenuation_dB;
  if (a > 50) return 0.1102 * (a - 8.7);
  if (a >= 21) return 0.5842 * (a - 21) ** 0.4 + 0.07886 * (a - 21);
  return 0;
}

/**
 * Taps that Kaiser's formula estimates: ceil((A - 7.95) / (2.285 * 2 pi width) + 1).
 * @param width  transition width, cycles/sample
 */
export function kaiserTaps(attenuation_dB: number, width: number): number {
  return Math.ceil((attenuation_dB - 7.95) / (2.285 * 2 * Math.PI * width) + 1);
}

/** The attenuation in dB that Kaiser's formula expects of so many taps: the inverse of kaiserTaps. */
export function kaiserAttenuation(taps: number, width: number): number {
  return 2.285 * (taps - 1) * 2 * Math.PI * width + 7.95;
}
