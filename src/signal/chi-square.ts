/**
 * The chi-square distribution, for the intervals of spectral estimates.
 * References: M. Abramowitz & I. A. Stegun (1964), Handbook of Mathematical Functions, 26.4 (recalled from
 * memory).
 */
import { inverseGammaP, inverseGammaQ } from "./incomplete-gamma.ts";

/**
 * Value that a chi-square variable stays below with probability p; relative error below 1e-12.
 * @param p    0 to 1; for p next to 1 the upper quantile keeps more digits
 * @param dof  degrees of freedom, 1 to 1e6, not necessarily whole
 */
export function chiSquareQuantile(p: number, dof: number): number {
  return 2 * inverseGammaP(dof / 2, p);
}

/** Value that a chi-square variable exceeds with probability q, however small. */
export function chiSquareUpperQuantile(q: number, dof: number): number {
  return 2 * inverseGammaQ(dof / 2, q);
}

/**
 * Factors on a spectral estimate that bound the true value with probability `level`, half of the rest on
 * either side: dof / quantile.
 * References: R. B. Blackman & J. W. Tukey (1958), The Measurement of Power Spectra, section 9 (recalled from
 * memory): the estimate is distributed as chi-square / dof times the true value.
 * @param dof    equivalent degrees of freedom, > 0
 * @param level  0 < level < 1, such as 0.95
 */
export function confidenceFactors(dof: number, level: number): { lower: number; upper: number } {
  if (!(level > 0 && level < 1)) throw new RangeError(`confidence level ${level} is not between 0 and 1`);
  const outside = (1 - level) / 2;
  return { lower: dof / chiSquareUpperQuantile(outside, dof), upper: dof / chiSquareQuantile(outside, dof) };
}

/**
 * Equivalent degrees of freedom of the mean of overlapping segments' spectra, away from zero and the Nyquist
 * frequency (there it is half as many):
 * 2 K / (1 + 2 sum over j of (1 - j / K) r(j)^2), r(j) = sum of w[n] w[n + j hop] / sum of w[n]^2.
 * Exact for Gaussian noise whose spectrum is even over a main lobe of the window.
 * References: P. D. Welch (1967), IEEE Transactions on Audio and Electroacoustics 15, 70-73, last section.
 * @param window    coefficients, not all zero
 * @param hop       samples from one segment's start to the next, >= 1
 * @param segments  K, >= 1
 */
export function equivalentDegreesOfFreedom(window: Float64Array, hop: number, segments: number): number {
  if (!(hop >= 1)) throw new RangeError(`hop ${hop} is not >= 1`);
  let energy = 0;
  for (const w of window) energy += w * w;
  let inflation = 1;
  for (let j = 1; j < segments && j * hop < window.length; j++) {
    let shifted = 0;
    for (let n = 0; n + j * hop < window.length; n++) shifted += window[n]! * window[n + j * hop]!;
    inflation += 2 * (1 - j / segments) * (shifted / energy) ** 2;
  }
  return (2 * segments) / inflation;
}
