/**
 * Least-squares polynomial of degree 0 to 5, in Legendre polynomials over the span of the abscissa, so that
 * the normal equations stay well-conditioned. Sums are kept to about twice the working precision.
 * References: P. J. Davis & P. Rabinowitz, Methods of Numerical Integration, 2.7 (Legendre recurrence);
 * T. J. Dekker (1971), Numerische Mathematik 18, 224-242 (error-free product); T. Ogita, S. M. Rump & S. Oishi
 * (2005), SIAM Journal on Scientific Computing 26, 1955-1988 (compensated dot product). Recalled from memory.
 */

export interface SolvedPolynomial {
  /** Value at t. */
  valueAt(t: number): number;
  /** Coefficients a0, a1, … in powers of (t - origin). */
  powers(origin: number): Float64Array;
}

export class PolynomialFit {
  readonly degree: number;
  count = 0;
  private readonly centre: number;
  private readonly half: number;
  private readonly gram: DoubleSum[];
  private readonly moments: DoubleSum[];
  private readonly basis: Float64Array;
  private pivot = 0;

  /** @param from, to  span of the abscissa, from < to; mapped to [-1, 1] */
  constructor(degree: number, from: number, to: number) {
    this.degree = degree;
    this.centre = (from + to) / 2;
    this.half = (to - from) / 2;
    const n = degree + 1;
    this.gram = Array.from({ length: (n * (n + 1)) / 2 }, () => new DoubleSum());
    this.moments = Array.from({ length: n }, () => new DoubleSum());
    this.basis = new Float64Array(n);
  }

  /** Adds a point; both finite. */
  add(t: number, y: number): void {
    // About the first value: a large constant costs no digits, and a constant record leaves exactly nothing.
    if (this.count === 0) this.pivot = y;
    this.count++;
    const { basis, degree } = this;
    legendre((t - this.centre) / this.half, basis);
    const d = y - this.pivot;
    let at = 0;
    for (let i = 0; i <= degree; i++) {
      this.moments[i]!.addProduct(basis[i]!, d);
      for (let j = 0; j <= i; j++) this.gram[at++]!.addProduct(basis[i]!, basis[j]!);
    }
  }

  /** null with fewer distinct points than the degree needs. */
  solve(): SolvedPolynomial | null {
    const { degree, half, centre, pivot } = this;
    const n = degree + 1;
    if (this.count < n) return null;
    const l = Array.from({ length: n }, () => new Float64Array(n));
    const g = (i: number, j: number) => this.gram[(i * (i + 1)) / 2 + j]!.total;
    for (let i = 0; i < n; i++)
      for (let j = 0; j <= i; j++) {
        let sum = g(i, j);
        for (let k = 0; k < j; k++) sum -= l[i]![k]! * l[j]![k]!;
        if (i !== j) l[i]![j] = sum / l[j]![j]!;
        else if (sum > 1e-13 * this.count) l[i]![i] = Math.sqrt(sum);
        else return null;
      }
    const substitute = (right: Float64Array): Float64Array => {
      const c = Float64Array.from(right);
      for (let i = 0; i < n; i++) {
        for (let k = 0; k < i; k++) c[i]! -= l[i]![k]! * c[k]!;
        c[i]! /= l[i]![i]!;
      }
      for (let i = n - 1; i >= 0; i--) {
        for (let k = i + 1; k < n; k++) c[i]! -= l[k]![i]! * c[k]!;
        c[i]! /= l[i]![i]!;
      }
      return c;
    };
    const right = Float64Array.from(this.moments, (m) => m.total);
    const c = substitute(right);
    // One step of refinement, with the residual in doubled precision.
    for (let round = 0; round < 2; round++) {
      const rest = Float64Array.from({ length: n }, (_, i) => {
        const sum = new DoubleSum();
        sum.addProduct(right[i]!, 1);
        sum.addProduct(this.moments[i]!.low, 1);
        for (let j = 0; j < n; j++) {
          const cell = this.gram[i >= j ? (i * (i + 1)) / 2 + j : (j * (j + 1)) / 2 + i]!;
          sum.addProduct(-cell.total, c[j]!);
          sum.addProduct(-cell.low, c[j]!);
        }
        return sum.total;
      });
      const change = substitute(rest);
      for (let i = 0; i < n; i++) c[i]! += change[i]!;
    }
    const basis = new Float64Array(n);
    return {
      valueAt: (t) => {
        legendre((t - centre) / half, basis);
        let sum = 0;
        for (let i = degree; i >= 0; i--) sum += c[i]! * basis[i]!;
        return pivot + sum;
      },
      powers: (origin) => powersAbout(c, centre, half, pivot, origin),
    };
  }
}

/** P0 … Pn at u by the three-term recurrence (i + 1) P[i+1] = (2 i + 1) u P[i] - i P[i-1]. */
function legendre(u: number, out: Float64Array): void {
  out[0] = 1;
  if (out.length > 1) out[1] = u;
  for (let i = 1; i + 1 < out.length; i++) out[i + 1] = ((2 * i + 1) * u * out[i]! - i * out[i - 1]!) / (i + 1);
}

/** Powers of u = (t - centre) / half turned into powers of (t - origin), by Taylor shift. */
function powersAbout(c: Float64Array, centre: number, half: number, pivot: number, origin: number): Float64Array {
  const n = c.length;
  // Coefficients of each Legendre polynomial in powers of u.
  const rows: Float64Array[] = [Float64Array.of(1), Float64Array.of(0, 1)];
  for (let i = 1; i + 1 < n; i++) {
    const next = new Float64Array(i + 2);
    rows[i]!.forEach((a, k) => {
      next[k + 1]! += ((2 * i + 1) * a) / (i + 1);
    });
    rows[i - 1]!.forEach((a, k) => {
      next[k]! -= (i * a) / (i + 1);
    });
    rows.push(next);
  }
  const a = new Float64Array(n);
  for (let i = 0; i < n; i++)
    rows[i]!.forEach((w, k) => {
      a[k]! += c[i]! * w;
    });
  // q(s) with s = t - origin: u = (s + origin - centre) / half.
  const shift = (origin - centre) / half;
  for (let i = 0; i < n; i++) for (let k = n - 2; k >= i; k--) a[k]! += shift * a[k + 1]!;
  for (let k = 0; k < n; k++) a[k]! /= half ** k;
  a[0]! += pivot;
  return a;
}

/** A sum of products in about twice the working precision. */
class DoubleSum {
  private sum = 0;
  private lost = 0;

  addProduct(a: number, b: number): void {
    const p = a * b;
    const ca = 134217729 * a;
    const ah = ca - (ca - a);
    const al = a - ah;
    const cb = 134217729 * b;
    const bh = cb - (cb - b);
    const bl = b - bh;
    const error = al * bl - (p - ah * bh - al * bh - ah * bl);
    const next = this.sum + p;
    const part = next - this.sum;
    this.lost += this.sum - (next - part) + (p - part) + error;
    this.sum = next;
  }

  /** Rounded to a double. */
  get total(): number {
    return this.sum + this.lost;
  }

  /** What `total` leaves out. */
  get low(): number {
    return this.sum - this.total + this.lost;
  }
}

/** Fit to whole arrays; NaN values are left out. null when there are too few points. */
export function fitPolynomial(t: ArrayLike<number>, y: ArrayLike<number>, degree: number): SolvedPolynomial | null {
  let from = Number.POSITIVE_INFINITY;
  let to = Number.NEGATIVE_INFINITY;
  for (let i = 0; i < t.length; i++)
    if (!Number.isNaN(y[i]!)) {
      from = Math.min(from, t[i]!);
      to = Math.max(to, t[i]!);
    }
  if (!(from <= to)) return null;
  const fit = new PolynomialFit(degree, from, to > from ? to : from + 1);
  for (let i = 0; i < t.length; i++) if (!Number.isNaN(y[i]!)) fit.add(t[i]!, y[i]!);
  return fit.solve();
}
