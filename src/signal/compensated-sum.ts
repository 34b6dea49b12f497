/**
 * A sum that keeps what rounding loses.
 * References: A. Neumaier (1974), Zeitschrift fuer Angewandte Mathematik und Mechanik 54, 39-51, algorithm IV
 * (recalled from memory).
 */

/**
 * Error of `total` below eps |sum| + O(n eps^2) sum of |x|, where a plain sum has n eps sum of |x|. The
 * result depends on the order of the terms, and on nothing else.
 */
export class CompensatedSum {
  private sum = 0;
  private lost = 0;

  /** Adds any number; NaN and infinities pass through to the total as in plain addition. */
  add(x: number): void {
    const next = this.sum + x;
    this.lost += Math.abs(this.sum) >= Math.abs(x) ? this.sum - next + x : x - next + this.sum;
    this.sum = next;
  }

  get total(): number {
    // With an infinity in the sum, what was lost is not a number.
    return Number.isFinite(this.sum) ? this.sum + this.lost : this.sum;
  }
}
