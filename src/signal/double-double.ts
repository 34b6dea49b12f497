/**
 * A number held as the unevaluated sum of two doubles, about 31 digits. Operations change the number in place,
 * so that hot loops allocate nothing.
 * References: T. J. Dekker (1971), Numerische Mathematik 18, 224-242 (splitting, error-free product, sum and
 * quotient); D. E. Knuth, The Art of Computer Programming 2, 4.2.2 (error-free sum). Recalled from memory.
 * Range: results below 1e300 in size (the split would overflow above) and not near the smallest doubles.
 */
export class DoubleDouble {
  hi = 0;
  lo = 0;

  set(hi: number, lo = 0): this {
    this.hi = hi;
    this.lo = lo;
    return this;
  }

  /** The difference of two doubles, exactly. */
  setDifference(a: number, b: number): this {
    const d = a - b;
    const back = a - d;
    // Whatever the sizes of a and b: what each lost (Knuth).
    this.hi = d;
    this.lo = a - (d + back) + (back - b);
    return this;
  }

  add(hi: number, lo = 0): this {
    const s = this.hi + hi;
    const part = s - this.hi;
    return this.settle(s, this.hi - (s - part) + (hi - part) + this.lo + lo);
  }

  multiply(hi: number, lo = 0): this {
    const p = this.hi * hi;
    return this.settle(p, productError(this.hi, hi, p) + (this.hi * lo + this.lo * hi));
  }

  divide(hi: number, lo = 0): this {
    const q = this.hi / hi;
    const p = q * hi;
    const rest = this.hi - p - productError(q, hi, p) + this.lo - q * lo;
    return this.settle(q, rest / hi);
  }

  /** Adds a product of two such numbers. */
  addProduct(aHi: number, aLo: number, bHi: number, bLo: number): this {
    const p = aHi * bHi;
    return this.add(p, productError(aHi, bHi, p) + (aHi * bLo + aLo * bHi));
  }

  private settle(hi: number, lo: number): this {
    this.hi = hi + lo;
    this.lo = hi - this.hi + lo;
    return this;
  }
}

/** a * b - p, exactly, where p is the rounded product. */
function productError(a: number, b: number, p: number): number {
  const ca = 134217729 * a;
  const aTop = ca - (ca - a);
  const aRest = a - aTop;
  const cb = 134217729 * b;
  const bTop = cb - (cb - b);
  const bRest = b - bTop;
  return aRest * bRest - (p - aTop * bTop - aRest * bTop - aTop * bRest);
}
