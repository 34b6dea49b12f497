/**
 * Weighted least-squares filters: the smallest integral of the weighted squared error over bands, in closed form.
 * References: D. W. Tufts & J. T. Francis (1970), IEEE Transactions on Audio and Electroacoustics AU-18, 487-494;
 * T. W. Parks & C. S. Burrus (1987), Digital Filter Design, section 3.2 (normal equations of a Toeplitz and a Hankel
 * part). Recalled from memory.
 */
import { conditionOf, type Factors, factorize, solve } from "./cholesky.ts";
import { type DesignBand, largestDontCareGain, refuseImpossibleBands, wantedGain } from "./design-bands.ts";
import { gaussLegendre } from "./gauss-legendre.ts";
import { leastSquares } from "./householder.ts";
import { amplitudeAt } from "./linear-phase.ts";

/** Above this the normal equations take seconds. */
export const MOST_LEAST_SQUARES_TAPS = 2001;

export interface LeastSquaresFilter {
  /** Exactly symmetric. */
  readonly taps: Float64Array;
  /** Sum over the bands of weight times the integral of (A - wanted)^2 over f, cycles/sample, measured on the taps. */
  readonly squaredError: number;
  /** Largest gain where nothing was asked: a warning when it passes the passband's. */
  readonly largestDontCareGain: number;
}

/**
 * @param taps   1 to 2001; odd lengths make type I, even lengths type II, which is zero at the Nyquist frequency
 * @param bands  rising, with gaps between
 * @throws DesignError for impossible bands
 */
export function designLeastSquares(taps: number, bands: readonly DesignBand[]): LeastSquaresFilter {
  refuseImpossibleBands(taps, MOST_LEAST_SQUARES_TAPS, bands);
  const parts = bands.map((band) => bandIntegrals(taps, band));
  const weights = bands.map((b) => b.weight);
  const solved = solveNormalEquations(taps, parts, weights);
  const h =
    conditionOf(solved.factors) < WELL_CONDITIONED
      ? solved.taps
      : (byReflections(taps, bands) ?? solved.taps);
  return {
    taps: h,
    squaredError: squaredError(h, bands),
    largestDontCareGain: largestDontCareGain(h, bands).gain,
  };
}

/** Condition of the normal equations up to which their solution keeps ten digits. */
const WELL_CONDITIONED = 1e5;

/**
 * The same minimum where wide gaps between the bands make the normal equations all but singular: the integrals become
 * sums over the points of a quadrature that is exact to rounding, and their square root is never squared.
 */
function byReflections(taps: number, bands: readonly DesignBand[]): Float64Array | null {
  const m = Math.ceil(taps / 2);
  const frequencies: number[] = [];
  const roots: number[] = [];
  const wanted: number[] = [];
  for (const band of bands) {
    const half = (band.to - band.from) / 2;
    // The products turn 2 N (to - from) times at most: pi / 2 points a turn, and some, are enough.
    const { points, weights } = gaussLegendre(Math.ceil(Math.PI * taps * half) + 30);
    for (const [i, x] of points.entries()) {
      const f = band.from + half * (1 + x);
      const root = Math.sqrt(band.weight * half * weights[i]!);
      frequencies.push(f);
      roots.push(root);
      wanted.push(root * wantedGain(band, f));
    }
  }
  const columns = Array.from({ length: m }, (_, i) => {
    const p = distance(taps, i);
    return Float64Array.from(frequencies, (f, row) => roots[row]! * Math.cos(2 * Math.PI * ((f * p) % 1)));
  });
  const coefficients = leastSquares(columns, Float64Array.from(wanted));
  return coefficients === null ? null : tapsFrom(taps, coefficients);
}

/** What a band of weight 1 contributes to the normal equations. */
export interface BandIntegrals {
  /** Integral of cos(2 pi f q), q = 0 … taps. */
  readonly cosines: Float64Array;
  /** Integral of wanted gain times cos(2 pi f p), p = the distance of each tap of the second half from the centre. */
  readonly wanted: Float64Array;
}

export function bandIntegrals(taps: number, band: DesignBand): BandIntegrals {
  const { from, to } = band;
  const cosines = new Float64Array(taps + 1).map((_, q) => integralOfCosine(from, to, q));
  const centre = (from + to) / 2;
  const slope = (wantedGain(band, to) - wantedGain(band, from)) / (to - from);
  const middle = wantedGain(band, centre);
  const wanted = new Float64Array(Math.ceil(taps / 2)).map((_, i) => {
    const p = distance(taps, i);
    return middle * integralOfCosine(from, to, p) + slope * integralOfRampCosine(from, to, p);
  });
  return { cosines, wanted };
}

/** Distance of the i-th tap of the second half from the centre, in samples. */
const distance = (taps: number, i: number): number => (taps % 2 === 1 ? i : i + 0.5);

/** Integral of cos(2 pi f q) from a to b. */
function integralOfCosine(a: number, b: number, q: number): number {
  const x = Math.PI * q * (b - a);
  const share = x === 0 ? 1 : Math.sin(x) / x;
  return (b - a) * share * Math.cos(Math.PI * ((q * (a + b)) % 2));
}

/** Integral of (f - centre) cos(2 pi f q) from a to b. */
function integralOfRampCosine(a: number, b: number, q: number): number {
  const h = (b - a) / 2;
  const x = 2 * Math.PI * q * h;
  // sin x - x cos x loses its digits for small x, where its series is short.
  const x2 = x * x;
  const bend =
    Math.abs(x) < 0.3
      ? (x * x2 * (1 - (x2 / 10) * (1 - (x2 / 28) * (1 - (x2 / 54) * (1 - x2 / 88))))) / 3
      : Math.sin(x) - x * Math.cos(x);
  if (x === 0) return 0;
  return (-2 * h * h * Math.sin(Math.PI * ((q * (a + b)) % 2)) * bend) / x2;
}

/** The taps for weights of the bands, from integrals that do not depend on the weights. */
export function solveNormalEquations(
  taps: number,
  parts: readonly BandIntegrals[],
  weights: readonly number[],
): { taps: Float64Array; factors: Factors } {
  const m = Math.ceil(taps / 2);
  const cosines = new Float64Array(taps + 1);
  const wanted = new Float64Array(m);
  for (const [b, part] of parts.entries()) {
    for (let q = 0; q <= taps; q++) cosines[q]! += weights[b]! * part.cosines[q]!;
    for (let i = 0; i < m; i++) wanted[i]! += weights[b]! * part.wanted[i]!;
  }
  // cos(p) cos(q) = (cos(p - q) + cos(p + q)) / 2; even lengths have distances of half samples, whose sum is i + j + 1.
  const odd = taps % 2 === 1;
  const matrix = new Float64Array(m * m);
  for (let i = 0; i < m; i++)
    for (let j = 0; j <= i; j++) {
      const value = (cosines[i - j]! + cosines[i + j + (odd ? 0 : 1)]!) / 2;
      matrix[i * m + j] = value;
      matrix[j * m + i] = value;
    }
  const factors = factorize(matrix, m);
  return { taps: tapsFrom(taps, solve(factors, wanted)), factors };
}

/** Taps of the amplitude with these coefficients of cos(2 pi f p), p the distance from the centre. */
function tapsFrom(taps: number, coefficients: Float64Array): Float64Array {
  const h = new Float64Array(taps);
  for (const [i, c] of coefficients.entries()) {
    const right = Math.floor(taps / 2) + i;
    h[right] = taps % 2 === 1 && i === 0 ? c : c / 2;
    h[taps - 1 - right] = h[right]!;
  }
  return h;
}

/** Panels to a turn of the response, each of four points. */
const PANELS = 8;
const PANEL = gaussLegendre(4);

/** Weighted integral of the squared error over the bands, cycles/sample. */
export function squaredError(taps: Float64Array, bands: readonly DesignBand[]): number {
  let whole = 0;
  for (const band of bands) {
    const panels = Math.ceil(PANELS * taps.length * (band.to - band.from)) + 1;
    const half = (band.to - band.from) / (2 * panels);
    let sum = 0;
    for (let i = 0; i < panels; i++)
      for (const [k, x] of PANEL.points.entries()) {
        const f = band.from + half * (2 * i + 1 + x);
        sum += PANEL.weights[k]! * (amplitudeAt(taps, f) - wantedGain(band, f)) ** 2;
      }
    whole += band.weight * half * sum;
  }
  return whole;
}
