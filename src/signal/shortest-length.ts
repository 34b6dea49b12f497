/** The smallest length at which a design succeeds, when success is monotone in length, or nearly so. */

export type Lengths = "odd" | "even" | "any";

export interface LengthSearch {
  /** Where to start. */
  readonly estimate: number;
  readonly lengths: Lengths;
  readonly most: number;
  /** Lengths in a row that must fail below the answer; 1 when success is strictly monotone. */
  readonly failuresInRow: number;
}

/**
 * Doubles its steps until success and failure enclose the answer, halves them, and then goes down until so many
 * lengths in a row have failed. Null when no length up to `most` was found to succeed.
 */
export function shortestLength<T>(attempt: (taps: number) => T | null, search: LengthSearch): T | null {
  const step = search.lengths === "any" ? 1 : 2;
  const least = search.lengths === "even" ? 2 : 1;
  const most = search.most - ((search.most - least) % step);
  const valid = (n: number) => least + step * Math.round((Math.min(Math.max(n, least), most) - least) / step);
  let n = valid(search.estimate);
  let found = attempt(n);
  let failed = least - step;
  for (let stride = step; found === null; stride *= 2) {
    failed = n;
    if (n >= most) return null;
    n = valid(n + stride);
    found = attempt(n);
  }
  for (let stride = step; n - stride > failed; stride *= 2) {
    const better = attempt(n - stride);
    if (better === null) {
      failed = n - stride;
      break;
    }
    found = better;
    n -= stride;
  }
  while (n - failed > step) {
    const middle = failed + step * Math.floor((n - failed) / (2 * step));
    const better = attempt(middle);
    if (better === null) failed = middle;
    else {
      found = better;
      n = middle;
    }
  }
  let failures = 1;
  for (let below = failed - step; below >= least && failures < search.failuresInRow; below -= step) {
    const better = attempt(below);
    failures = better === null ? failures + 1 : 0;
    if (better !== null) found = better;
  }
  return found;
}
