/**
 * Symmetric positive equations by Cholesky's factors, with iterative refinement. Matrices that are singular to
 * working precision are made solvable by a small addition to the diagonal, which leaves what matters unchanged: a
 * direction that the matrix hardly sees gets a small coefficient instead of an arbitrary one.
 * References: N. J. Higham (2002), Accuracy and Stability of Numerical Algorithms, chapters 10 and 12. Recalled from
 * memory.
 */

export interface Factors {
  readonly size: number;
  /** Row by row. */
  readonly matrix: Float64Array;
  /** Lower triangle, row by row. */
  readonly lower: Float64Array;
  /** Added to the diagonal; 0 when the matrix was well enough conditioned. */
  readonly added: number;
}

/** Share of the largest diagonal element that rounding can explain. */
const MOST_ADDED = 1e-6;

/**
 * @param matrix  size x size, row by row, symmetric, positive semidefinite up to rounding
 * @throws RangeError when it is not
 */
export function factorize(matrix: Float64Array, size: number): Factors {
  let largest = 0;
  for (let i = 0; i < size; i++) largest = Math.max(largest, matrix[i * size + i]!);
  const least = size * Number.EPSILON * largest;
  for (let added = 0; ; added = added === 0 ? 4 * least : 10 * added) {
    const lower = lowerFactor(matrix, size, added, least);
    if (lower !== null) return { size, matrix, lower, added };
    if (!(added < MOST_ADDED * largest)) throw new RangeError("the matrix is not positive");
  }
}

/** Null when a pivot falls below the least that rounding leaves meaningful. */
function lowerFactor(a: Float64Array, n: number, added: number, least: number): Float64Array | null {
  const l = new Float64Array(n * n);
  for (let i = 0; i < n; i++)
    for (let j = 0; j <= i; j++) {
      let sum = a[i * n + j]! + (i === j ? added : 0);
      const ri = i * n;
      const rj = j * n;
      for (let k = 0; k < j; k++) sum -= l[ri + k]! * l[rj + k]!;
      if (i > j) l[ri + j] = sum / l[rj + j]!;
      else if (sum > least) l[ri + i] = Math.sqrt(sum);
      else return null;
    }
  return l;
}

const ROUNDS = 6;

/**
 * Condition number by inverse iteration from a fixed start: within some per cent where it is large (pivots alone can
 * hide it altogether). Infinity when something had to be added to the diagonal.
 */
export function conditionOf({ size: n, matrix, lower, added }: Factors): number {
  if (added > 0) return Number.POSITIVE_INFINITY;
  let largest = 0;
  for (let i = 0; i < n; i++) {
    let row = 0;
    for (let k = 0; k < n; k++) row += Math.abs(matrix[i * n + k]!);
    largest = Math.max(largest, row);
  }
  // Signs without a pattern that an eigenvector might be blind to.
  let x: Float64Array = new Float64Array(n).map((_, i) => Math.cos(i * i));
  let growth = 1;
  for (let round = 0; round < ROUNDS; round++) {
    const norm = Math.sqrt(x.reduce((sum, v) => sum + v * v, 0));
    const next = substitute(
      lower,
      n,
      x.map((v) => v / norm),
    );
    growth = Math.sqrt(next.reduce((sum, v) => sum + v * v, 0));
    x = next;
  }
  return largest * growth;
}

const REFINEMENTS = 3;

export function solve({ size: n, matrix, lower, added }: Factors, right: Float64Array): Float64Array {
  const x = substitute(lower, n, right);
  // With an addition, refinement would fetch back what it was meant to damp.
  for (let i = 0; added === 0 && i < REFINEMENTS; i++) {
    const residual = right.map((b, row) => {
      let sum = b;
      for (let k = 0; k < n; k++) sum -= matrix[row * n + k]! * x[k]!;
      return sum;
    });
    const more = substitute(lower, n, residual);
    for (let k = 0; k < n; k++) x[k]! += more[k]!;
  }
  return x;
}

function substitute(l: Float64Array, n: number, right: Float64Array): Float64Array {
  const x = right.slice();
  for (let i = 0; i < n; i++) {
    let sum = x[i]!;
    for (let k = 0; k < i; k++) sum -= l[i * n + k]! * x[k]!;
    x[i] = sum / l[i * n + i]!;
  }
  for (let i = n - 1; i >= 0; i--) {
    const value = x[i]! / l[i * n + i]!;
    x[i] = value;
    for (let k = 0; k < i; k++) x[k]! -= l[i * n + k]! * value;
  }
  return x;
}
