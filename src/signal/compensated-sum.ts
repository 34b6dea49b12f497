/**
 * A sum that keeps what rounding loses.
 * References: A. Neumaier (1974), Zeitschrift fuer Angewandte Mathematik und Mechanik 54, 39-51, algorithm IV
 * (recalled from memory).
 */
export class CompensatedSum {
  private sum = 0;
  private lost = 0;

  add(x: number): void {
    const next = this.sum + x;
    this.lost += Math.abs(this.sum) >= Math.abs(x) ? this.sum - next + x : x - next + this.sum;
    this.sum = next;
  }

  get total(): number {
    return this.sum + this.lost;
  }
}
