/**
 * Least-squares polynomial of degree 0 to 5 in one pass: normal equations in Legendre polynomials over the
 * span of the abscissa, with basis, sums and solution in double-double, so that what the normal equations
 * cost in digits is not missed.
 * References: G. W. Stewart (1998), Matrix Algorithms 1, 2.3 (normal equations, LDL' factors); M. Abramowitz &
 * I. A. Stegun (1964), Handbook of Mathematical Functions, 22.3.8 (Legendre polynomials). Recalled from memory.
 */
import { DoubleDouble } from "./double-double.ts";

export const HIGHEST_DEGREE = 5;

/** Legendre P0 … P5 as polynomials in u^2, highest power first; the odd ones times u. Exact in doubles. */
const LEGENDRE = [[1], [1], [1.5, -0.5], [2.5, -1.5], [4.375, -3.75, 0.375], [7.875, -8.75, 1.875]];
/** A direction that the abscissae resolve by less than this share of the span (squared) counts as unresolved. */
const LEAST_PIVOT = 1e-20;

export interface SolvedPolynomial {
  /** Coefficients of P0 … Pn of u = (t - (from + to) / 2) / ((to - from) / 2). */
  readonly legendre: Float64Array;
  /** Value at t; where the points were all equal, exactly their value. */
  valueAt(t: number): number;
  /** Coefficients a0, a1, … in powers of (t - origin). */
  powers(origin: number): Float64Array;
}

export class PolynomialFit {
  readonly degree: number;
  private readonly centre: number;
  private readonly half: number;
  private readonly basis: DoubleDouble[];
  /** Rows of the lower triangle, one after another. */
  private readonly gram: DoubleDouble[];
  private readonly moments: DoubleDouble[];
  private readonly square = new DoubleDouble();
  private readonly departure = new DoubleDouble();
  private readonly distinct: number[] = [];
  private points = 0;
  private pivot = 0;
  private lowest = Number.POSITIVE_INFINITY;
  private highest = Number.NEGATIVE_INFINITY;

  /**
   * @param degree    0 to 5
   * @param from, to  span of the abscissa, from <= to, finite. Points outside it are taken too, but the
   *                  equations are well-conditioned only for points that lie in it and fill some of it
   * @throws RangeError outside these ranges
   */
  constructor(degree: number, from: number, to: number) {
    if (!(Number.isInteger(degree) && degree >= 0 && degree <= HIGHEST_DEGREE))
      throw new RangeError(`degree ${degree} is not a whole number from 0 to ${HIGHEST_DEGREE}`);
    if (!(from <= to && Number.isFinite(to - from)))
      throw new RangeError(`span from ${from} to ${to} is turned round or has no end`);
    this.degree = degree;
    this.centre = from + (to - from) / 2;
    this.half = (to - from) / 2 || 1;
    const n = degree + 1;
    const numbers = (count: number) => Array.from({ length: count }, () => new DoubleDouble());
    this.basis = numbers(n);
    this.gram = numbers((n * (n + 1)) / 2);
    this.moments = numbers(n);
  }

  /** Points added. */
  get count(): number {
    return this.points;
  }

  /** Adds a point, both finite, |y| < 1e290. The result depends on the order of the points, and on nothing else. */
  add(t: number, y: number): void {
    // About the first value: a large constant costs no digits, and a constant record leaves exactly nothing.
    if (this.points === 0) this.pivot = y;
    this.points++;
    if (this.distinct.length <= this.degree && !this.distinct.includes(t)) this.distinct.push(t);
    if (t < this.lowest) this.lowest = t;
    if (t > this.highest) this.highest = t;
    const { basis, gram, moments, degree, departure } = this;
    this.evaluateBasis(t);
    departure.setDifference(y, this.pivot);
    // P0 is 1: its products need no multiplication.
    moments[0]!.add(departure.hi, departure.lo);
    gram[0]!.hi = this.points;
    for (let i = 1, at = 1; i <= degree; i++) {
      const b = basis[i]!;
      moments[i]!.addProduct(b.hi, b.lo, departure.hi, departure.lo);
      gram[at++]!.add(b.hi, b.lo);
      for (let j = 1; j <= i; j++) {
        const c = basis[j]!;
        gram[at++]!.addProduct(b.hi, b.lo, c.hi, c.lo);
      }
    }
  }

  /**
   * null with fewer distinct abscissae than degree + 1, or with such as lie too close together for the span
   * to be told apart (for degree 5, all within about 1 % of it).
   */
  solve(): SolvedPolynomial | null {
    if (this.distinct.length <= this.degree) return null;
    const c = solveSymmetric(this.gram, this.moments, LEAST_PIVOT * this.points);
    if (c === null) return null;
    const { centre, half, pivot } = this;
    // Evaluated about the middle of the points, where powers up to the fifth are well-conditioned.
    const middle = this.lowest + (this.highest - this.lowest) / 2;
    const reach = (this.highest - this.lowest) / 2 || 1;
    const powersOfU = fromLegendre(c);
    const local = Float64Array.from(shifted(powersOfU, centre, half, middle), (a, k) => {
      for (let i = 0; i < k; i++) a.multiply(reach);
      return a.hi;
    });
    return {
      legendre: Float64Array.from(c, (x, i) => (i === 0 ? x.add(pivot).hi : x.hi)),
      valueAt: (t) => {
        const w = (t - middle) / reach;
        let sum = 0;
        for (let k = local.length - 1; k >= 0; k--) sum = sum * w + local[k]!;
        return pivot + sum;
      },
      powers: (origin) =>
        Float64Array.from(shifted(powersOfU, centre, half, origin), (a, k) =>
          k === 0 ? a.add(pivot).hi : a.hi,
        ),
    };
  }

  /** P1 … Pn at u = (t - centre) / half. */
  private evaluateBasis(t: number): void {
    const { basis, degree, square } = this;
    if (degree === 0) return;
    const u = basis[1]!.setDifference(t, this.centre).divide(this.half);
    if (degree === 1) return;
    square.set(u.hi, u.lo).multiply(u.hi, u.lo);
    for (let i = 2; i <= degree; i++) {
      const terms = LEGENDRE[i]!;
      const p = basis[i]!.set(terms[0]!);
      for (let k = 1; k < terms.length; k++) p.multiply(square.hi, square.lo).add(terms[k]!);
      if (i % 2 === 1) p.multiply(u.hi, u.lo);
    }
  }
}

/** Solves G c = r by G = L D L'; null when a pivot falls to `least` or below. */
function solveSymmetric(
  gram: readonly DoubleDouble[],
  right: readonly DoubleDouble[],
  least: number,
): DoubleDouble[] | null {
  const n = right.length;
  // Below the diagonal: L; on it: D. `scaled` holds L times D of the row in hand.
  const l = gram.map((g) => new DoubleDouble().set(g.hi, g.lo));
  const at = (i: number, j: number) => l[(i * (i + 1)) / 2 + j]!;
  for (let i = 0; i < n; i++) {
    const scaled: DoubleDouble[] = [];
    for (let j = 0; j < i; j++) {
      const x = at(i, j);
      for (let k = 0; k < j; k++) x.addProduct(-scaled[k]!.hi, -scaled[k]!.lo, at(j, k).hi, at(j, k).lo);
      scaled.push(new DoubleDouble().set(x.hi, x.lo));
      x.divide(at(j, j).hi, at(j, j).lo);
    }
    const d = at(i, i);
    for (let k = 0; k < i; k++) d.addProduct(-scaled[k]!.hi, -scaled[k]!.lo, at(i, k).hi, at(i, k).lo);
    if (!(d.hi > least)) return null;
  }
  const c = right.map((r) => new DoubleDouble().set(r.hi, r.lo));
  const take = (x: DoubleDouble, factor: DoubleDouble, y: DoubleDouble) =>
    x.addProduct(-factor.hi, -factor.lo, y.hi, y.lo);
  for (let i = 0; i < n; i++) for (let k = 0; k < i; k++) take(c[i]!, at(i, k), c[k]!);
  for (let i = 0; i < n; i++) c[i]!.divide(at(i, i).hi, at(i, i).lo);
  for (let i = n - 1; i >= 0; i--) for (let k = i + 1; k < n; k++) take(c[i]!, at(k, i), c[k]!);
  return c;
}

/** Coefficients in powers of u from those of the Legendre polynomials. */
function fromLegendre(c: readonly DoubleDouble[]): DoubleDouble[] {
  const a = c.map(() => new DoubleDouble());
  c.forEach((x, i) => {
    LEGENDRE[i]!.forEach((term, k) => {
      a[i - 2 * k]!.addProduct(x.hi, x.lo, term, 0);
    });
  });
  return a;
}

/** Powers of u = (t - centre) / half turned into powers of (t - origin), by repeated synthetic division. */
function shifted(a: readonly DoubleDouble[], centre: number, half: number, origin: number): DoubleDouble[] {
  const out = a.map((x) => new DoubleDouble().set(x.hi, x.lo));
  const shift = new DoubleDouble().setDifference(origin, centre).divide(half);
  for (let i = 0; i < out.length; i++)
    for (let k = out.length - 2; k >= i; k--)
      out[k]!.addProduct(shift.hi, shift.lo, out[k + 1]!.hi, out[k + 1]!.lo);
  for (let k = 1; k < out.length; k++) for (let i = 0; i < k; i++) out[k]!.divide(half);
  return out;
}

/**
 * Fit to whole arrays of equal length; points whose t or y is NaN are left out.
 * @returns null when too few distinct abscissae are left
 */
export function fitPolynomial(
  t: ArrayLike<number>,
  y: ArrayLike<number>,
  degree: number,
): SolvedPolynomial | null {
  let from = Number.POSITIVE_INFINITY;
  let to = Number.NEGATIVE_INFINITY;
  for (let i = 0; i < t.length; i++)
    if (!Number.isNaN(y[i]!) && !Number.isNaN(t[i]!)) {
      if (t[i]! < from) from = t[i]!;
      if (t[i]! > to) to = t[i]!;
    }
  if (!(from <= to)) return null;
  const fit = new PolynomialFit(degree, from, to);
  for (let i = 0; i < t.length; i++) if (!Number.isNaN(y[i]!) && !Number.isNaN(t[i]!)) fit.add(t[i]!, y[i]!);
  return fit.solve();
}
