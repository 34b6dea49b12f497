/** The smallest length at which a design succeeds, when success is nearly, but not strictly, monotone in length. */

export interface LengthSearch {
  /** Where to start. */
  readonly estimate: number;
  /** 2: odd lengths only; 1: any. */
  readonly step: 1 | 2;
  readonly most: number;
  /** Lengths in a row that must fail below the answer; with a monotone design, 1. */
  readonly failuresInRow?: number;
}

/** Lobes that move past an edge make one length fail and a shorter one succeed, over a few lengths. */
const FAILURES_IN_ROW = 4;

/**
 * Doubles its steps until success and failure enclose the answer, halves them, and then goes down until so many
 * lengths in a row have failed. Null when no length up to `most` was found to succeed.
 */
export function shortestLength<T>(attempt: (taps: number) => T | null, search: LengthSearch): T | null {
  const { step, most } = search;
  const valid = (n: number) => (step === 2 && n % 2 === 0 ? n + 1 : n);
  const least = 1;
  let n = valid(Math.min(Math.max(least, Math.round(search.estimate)), valid(most - step + 1)));
  let found = attempt(n);
  let stride = step;
  let failed = least - step;
  while (found === null) {
    failed = n;
    if (n + step > most) return null;
    n = Math.min(valid(n + stride), step === 2 && most % 2 === 0 ? most - 1 : most);
    stride *= 2;
    found = attempt(n);
  }
  let shortest = n;
  for (stride = step; shortest - stride > failed; stride *= 2) {
    const better = attempt(shortest - stride);
    if (better === null) {
      failed = shortest - stride;
      break;
    }
    found = better;
    shortest -= stride;
  }
  while (shortest - failed > step) {
    const middle = failed + step * Math.floor((shortest - failed) / (2 * step));
    const better = attempt(middle);
    if (better === null) failed = middle;
    else {
      found = better;
      shortest = middle;
    }
  }
  const enough = search.failuresInRow ?? FAILURES_IN_ROW;
  let failures = 1;
  for (let below = failed - step; below >= least && failures < enough; below -= step) {
    const better = attempt(below);
    failures = better === null ? failures + 1 : 0;
    if (better !== null) found = better;
  }
  return found;
}
