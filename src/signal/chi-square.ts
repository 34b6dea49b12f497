/**
 * Chi-square quantiles, for the intervals of spectral estimates.
 * References: M. Abramowitz & I. A. Stegun (1964), Handbook of Mathematical Functions, 6.5.29 (series) and
 * 6.5.31 (continued fraction) of the incomplete gamma function; C. Lanczos (1964), SIAM Journal on Numerical
 * Analysis B 1, 86-96 (log gamma; coefficients for g = 7, n = 9, recalled from memory); E. B. Wilson & M. M.
 * Hilferty (1931), PNAS 17, 684-688 (starting value of the quantile).
 */

const LANCZOS = [
  0.99999999999980993, 676.5203681218851, -1259.1392167224028, 771.32342877765313, -176.61502916214059,
  12.507343278686905, -0.13857109526572012, 9.9843695780195716e-6, 1.5056327351493116e-7,
];

export function logGamma(x: number): number {
  if (x < 0.5) return Math.log(Math.PI / Math.sin(Math.PI * x)) - logGamma(1 - x);
  const z = x - 1;
  let sum = LANCZOS[0]!;
  for (let i = 1; i < 9; i++) sum += LANCZOS[i]! / (z + i);
  const t = z + 7.5;
  return 0.5 * Math.log(2 * Math.PI) + (z + 0.5) * Math.log(t) - t + Math.log(sum);
}

/** Regularised lower incomplete gamma function P(a, x), a > 0, x >= 0. */
export function gammaP(a: number, x: number): number {
  if (x <= 0) return 0;
  const front = Math.exp(-x + a * Math.log(x) - logGamma(a));
  if (x < a + 1) {
    let term = 1 / a;
    let sum = term;
    for (let n = a + 1; term > sum * 1e-17; n++) {
      term *= x / n;
      sum += term;
    }
    return sum * front;
  }
  // Modified Lentz evaluation of the continued fraction for Q = 1 - P.
  const tiny = 1e-300;
  let b = x + 1 - a;
  let c = 1 / tiny;
  let d = 1 / b;
  let h = d;
  for (let i = 1; i < 100_000; i++) {
    const an = -i * (i - a);
    b += 2;
    d = an * d + b;
    if (Math.abs(d) < tiny) d = tiny;
    c = b + an / c;
    if (Math.abs(c) < tiny) c = tiny;
    d = 1 / d;
    const change = d * c;
    h *= change;
    if (Math.abs(change - 1) < 1e-16) break;
  }
  return 1 - front * h;
}

/** Value that a chi-square variable with `dof` degrees of freedom stays below with probability p. */
export function chiSquareQuantile(p: number, dof: number): number {
  const z = normalQuantile(p);
  const c = 2 / (9 * dof);
  let low = 0;
  let high = Math.max(1, dof * Math.max(1e-6, 1 - c + z * Math.sqrt(c)) ** 3) * 4 + 40;
  for (let i = 0; i < 200 && high - low > 1e-15 * high; i++) {
    const middle = (low + high) / 2;
    if (gammaP(dof / 2, middle / 2) < p) low = middle;
    else high = middle;
  }
  return (low + high) / 2;
}

/** Rough normal quantile (Abramowitz & Stegun 26.2.23, error below 4.5e-4): only a starting value. */
function normalQuantile(p: number): number {
  const q = p < 0.5 ? p : 1 - p;
  const t = Math.sqrt(-2 * Math.log(q));
  const x = t - (2.515517 + 0.802853 * t + 0.010328 * t * t) / (1 + 1.432788 * t + 0.189269 * t * t + 0.001308 * t ** 3);
  return p < 0.5 ? -x : x;
}

/** Factors on a spectral estimate that bound the true value with probability `level`: dof / quantiles. */
export function confidenceFactors(dof: number, level: number): { lower: number; upper: number } {
  const tail = (1 - level) / 2;
  return { lower: dof / chiSquareQuantile(1 - tail, dof), upper: dof / chiSquareQuantile(tail, dof) };
}

/**
 * Equivalent degrees of freedom of the mean of overlapping segments' spectra:
 * 2 K / (1 + 2 sum over j of (1 - j / K) rho(j)), rho(j) the squared overlap correlation of the window.
 * References: P. D. Welch (1967), IEEE Transactions on Audio and Electroacoustics 15, 70-73.
 */
export function equivalentDegreesOfFreedom(window: Float64Array, hop: number, segments: number): number {
  const energy = window.reduce((sum, w) => sum + w * w, 0);
  let inflation = 1;
  for (let j = 1; j < segments && j * hop < window.length; j++) {
    let shifted = 0;
    for (let n = 0; n + j * hop < window.length; n++) shifted += window[n]! * window[n + j * hop]!;
    inflation += 2 * (1 - j / segments) * (shifted / energy) ** 2;
  }
  return (2 * segments) / inflation;
}
