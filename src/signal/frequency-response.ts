/**
 * Response of a filter at one frequency, in cycles/sample, 0 to 0.5.
 * References: A. V. Oppenheim & R. W. Schafer, Discrete-Time Signal Processing, section 5.1 (recalled from memory).
 */

/** Taps after which the rotation is renewed, so that its error stays below 1e-14. */
const RENEWED_EVERY = 64;

/** H(f) = sum of taps[n] e^(-2 pi i f n). */
export function responseAt(taps: Float64Array, f: number): { re: number; im: number } {
  let re = 0;
  let im = 0;
  const stepRe = Math.cos(2 * Math.PI * f);
  const stepIm = -Math.sin(2 * Math.PI * f);
  let a = 1;
  let b = 0;
  for (let n = 0; n < taps.length; n++) {
    if (n % RENEWED_EVERY === 0) {
      const turn = 2 * Math.PI * ((f * n) % 1);
      a = Math.cos(turn);
      b = -Math.sin(turn);
    }
    re += taps[n]! * a;
    im += taps[n]! * b;
    const next = a * stepRe - b * stepIm;
    b = a * stepIm + b * stepRe;
    a = next;
  }
  return { re, im };
}

/** |H(f)|. */
export function gainAt(taps: Float64Array, f: number): number {
  const { re, im } = responseAt(taps, f);
  return Math.hypot(re, im);
}
