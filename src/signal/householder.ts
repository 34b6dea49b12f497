/**
 * Linear least squares by Householder's reflections: keeps twice the digits that the normal equations keep.
 * References: G. H. Golub & C. F. Van Loan (2013), Matrix Computations, 4th ed., sections 5.1 to 5.3 (recalled from
 * memory).
 */

/** Diagonal below which, as a share of the largest, a column is taken to depend on those before it. */
const DEPENDENT = 1e-13;

/**
 * The x of smallest |A x - b|.
 * @param columns  of A, each with as many rows as b, at least as many rows as columns; overwritten
 * @param b        overwritten
 * @returns null when a column depends on the others to working precision
 */
export function leastSquares(columns: readonly Float64Array[], b: Float64Array): Float64Array | null {
  const n = columns.length;
  const diagonal = new Float64Array(n);
  for (let j = 0; j < n; j++) {
    const v = columns[j]!;
    const norm = Math.sqrt(dotFrom(v, v, j));
    if (!(norm > 0)) return null;
    // The reflection takes the column to -sign(v[j]) norm, away from cancellation; v becomes its direction.
    diagonal[j] = v[j]! > 0 ? -norm : norm;
    v[j]! -= diagonal[j]!;
    const scale = -1 / (diagonal[j]! * v[j]!);
    for (let k = j + 1; k < n; k++) addFrom(columns[k]!, v, -scale * dotFrom(v, columns[k]!, j), j);
    addFrom(b, v, -scale * dotFrom(v, b, j), j);
  }
  const largest = diagonal.reduce((m, d) => Math.max(m, Math.abs(d)), 0);
  const x = new Float64Array(n);
  for (let j = n - 1; j >= 0; j--) {
    if (!(Math.abs(diagonal[j]!) > DEPENDENT * largest)) return null;
    let sum = b[j]!;
    for (let k = j + 1; k < n; k++) sum -= columns[k]![j]! * x[k]!;
    x[j] = sum / diagonal[j]!;
  }
  return x;
}

function dotFrom(a: Float64Array, b: Float64Array, start: number): number {
  let sum = 0;
  for (let i = start; i < a.length; i++) sum += a[i]! * b[i]!;
  return sum;
}

function addFrom(to: Float64Array, what: Float64Array, times: number, start: number): void {
  for (let i = start; i < to.length; i++) to[i]! += times * what[i]!;
}
