/**
 * Savitzky-Golay smoothing: the value (or a derivative) of the polynomial fitted to a window by least squares.
 * References: A. Savitzky & M. J. E. Golay (1964), Analytical Chemistry 36, 1627-1639, with the corrections of
 * J. Steinier, Y. Termonia & J. Deltour (1972), Analytical Chemistry 44, 1906-1909; P. A. Gorry (1990), Analytical
 * Chemistry 62, 570-573 (Gram polynomials, end points). Recalled from memory; the weights are checked against exact
 * fractions.
 */
import { DesignError } from "./design-error.ts";

const LONGEST = 20_001;
const HIGHEST_DEGREE = 40;

/** Orthonormal polynomials on the integers -m … m, and the smoothing weights that follow. */
export class PolynomialWindow {
  readonly length: number;
  readonly degree: number;
  /** Value of each polynomial, degree 0 first, at each point. */
  private readonly basis: Float64Array[];

  /**
   * @param length  odd, 1 to 20,001
   * @param degree  0 to length - 1, at most 40
   * @throws DesignError when they are not such
   */
  constructor(length: number, degree: number) {
    refuse(length, degree);
    this.length = length;
    this.degree = degree;
    this.basis = orthonormalBasis(length, degree);
  }

  /**
   * Weights in order of time of the samples in the window, for the fitted polynomial at a point of it.
   * @param offset      from the centre, in samples: -m is the oldest sample, m the newest
   * @param derivative  order, 0 for the value; per sample interval to that power
   */
  row(offset: number, derivative = 0): Float64Array {
    const { length, basis } = this;
    const m = (length - 1) / 2;
    if (!(Number.isInteger(offset) && Math.abs(offset) <= m))
      throw new RangeError(`offset ${offset} is not a point of a window of ${length}`);
    const at = derivative === 0 ? basis.map((p) => p[m + offset]!) : this.derivatives(offset, derivative);
    const row = new Float64Array(length);
    for (const [k, p] of basis.entries()) for (let j = 0; j < length; j++) row[j]! += at[k]! * p[j]!;
    return row;
  }

  /** Derivatives of the basis by the recurrence x p[k] = b[k + 1] p[k + 1] + b[k] p[k - 1], differentiated. */
  private derivatives(x: number, order: number): Float64Array {
    const { degree, length } = this;
    const m = (length - 1) / 2;
    let lower = Float64Array.from(this.basis, (p) => p[m + x]!);
    for (let d = 1; d <= order; d++) {
      const next = new Float64Array(degree + 1);
      for (let k = 0; k < degree; k++)
        next[k + 1] =
          (d * lower[k]! + x * next[k]! - (k > 0 ? step(k, length) * next[k - 1]! : 0)) / step(k + 1, length);
      lower = next;
    }
    return lower;
  }
}

/**
 * Taps in order of convolution (the first weighs the newest sample).
 * At the centre they are exactly symmetric, delay (length - 1) / 2; at the trailing end the newest sample is
 * estimated, without symmetry.
 */
export function savitzkyGolayTaps(
  length: number,
  degree: number,
  at: "centre" | "trailing-end",
): Float64Array {
  const window = new PolynomialWindow(length, degree);
  if (at === "trailing-end") return window.row((length - 1) / 2).reverse();
  const row = window.row(0);
  return row.map((w, i) => (w + row[length - 1 - i]!) / 2);
}

/** b[k] of the recurrence of the polynomials orthonormal on n even points (Gram's, normed). */
const step = (k: number, n: number): number => (k / 2) * Math.sqrt((n * n - k * k) / (4 * k * k - 1));

/**
 * The recurrence alone loses orthogonality beyond a degree of about twice the root of the length, so each vector is
 * made orthogonal to those of its own parity again, twice.
 */
function orthonormalBasis(n: number, degree: number): Float64Array[] {
  const m = (n - 1) / 2;
  const basis = [new Float64Array(n).fill(1 / Math.sqrt(n))];
  for (let k = 0; k < degree; k++) {
    const [p, before] = [basis[k]!, basis[k - 1]];
    const up = step(k + 1, n);
    const down = k > 0 ? step(k, n) : 0;
    let next = p.map((value, j) => ((j - m) * value - (before === undefined ? 0 : down * before[j]!)) / up);
    for (let pass = 0; pass < 2; pass++)
      for (let q = (k + 1) % 2; q <= k; q += 2) {
        const other = basis[q]!;
        const share = dot(next, other);
        next = next.map((value, j) => value - share * other[j]!);
      }
    const norm = Math.sqrt(dot(next, next));
    basis.push(next.map((value) => value / norm));
  }
  return basis;
}

const dot = (a: Float64Array, b: Float64Array): number => a.reduce((sum, x, j) => sum + x * b[j]!, 0);

function refuse(length: number, degree: number): void {
  if (!(Number.isInteger(length) && length % 2 === 1 && length >= 1 && length <= LONGEST))
    throw new DesignError({
      problem: "a Savitzky-Golay window has a middle point, so its length is odd",
      given: `${length} points`,
      allowed: `an odd number from 1 to ${LONGEST}`,
      todo:
        length >= 1 && length < LONGEST
          ? `use ${2 * Math.floor(length / 2) + 1} points`
          : "change the length",
    });
  const highest = Math.min(length - 1, HIGHEST_DEGREE);
  if (!(Number.isInteger(degree) && degree >= 0 && degree <= highest))
    throw new DesignError({
      problem: "a polynomial needs more points than its degree",
      given: `degree ${degree} on ${length} points`,
      allowed: `0 to ${highest}`,
      todo: "lower the degree, or use more points",
    });
}
