/**
 * Values between samples: straight lines, the nearest sample, and the mean of a cell. Abscissae rise strictly;
 * nothing is put outside the first and the last of them (NaN there).
 */
import { CompensatedSum } from "./compensated-sum.ts";

/**
 * Index k of the last abscissa at or before `at`; -1 before the first. Binary search.
 * @param t  rising
 */
export function bracketBelow(t: Float64Array, at: number): number {
  let low = 0;
  let high = t.length;
  while (low < high) {
    const middle = (low + high) >>> 1;
    if (t[middle]! <= at) low = middle + 1;
    else high = middle;
  }
  return low - 1;
}

/** On the line through (t0, y0) and (t1, y1), t0 < t1; exactly y0 and y1 at the two ends. */
export function onLine(t0: number, y0: number, t1: number, y1: number, at: number): number {
  const u = (at - t0) / (t1 - t0);
  return u <= 0.5 ? y0 + (y1 - y0) * u : y1 - (y1 - y0) * ((t1 - at) / (t1 - t0));
}

/** Straight line between the two samples around `at`. */
export function straightLineAt(t: Float64Array, y: Float64Array, at: number): number {
  const k = bracketBelow(t, at);
  if (k < 0 || !(at <= t[t.length - 1]!)) return Number.NaN;
  return at === t[k] ? y[k]! : onLine(t[k]!, y[k]!, t[k + 1]!, y[k + 1]!, at);
}

/** The sample nearest in time, the earlier of two equally near. */
export function nearestSampleAt(t: Float64Array, y: Float64Array, at: number): number {
  const k = bracketBelow(t, at);
  if (k < 0 || !(at <= t[t.length - 1]!)) return Number.NaN;
  return k + 1 < t.length && t[k + 1]! - at < at - t[k]! ? y[k + 1]! : y[k]!;
}

/**
 * Exact means of the straight-line interpolant over the cells from edges[i] to edges[i + 1]: its integral by
 * the trapezium rule, which is exact for straight lines, over the cell's length. One sweep over the samples.
 * As a filter on the interpolant it has the gain |sin(pi f T) / (pi f T)|, T the cell's length (closed form).
 * @param edges  rising, at least two
 * @returns one mean a cell; NaN where the samples do not reach over the whole cell
 */
export function cellMeans(t: Float64Array, y: Float64Array, edges: Float64Array): Float64Array {
  const out = new Float64Array(Math.max(0, edges.length - 1)).fill(Number.NaN);
  let k = Math.max(0, bracketBelow(t, edges[0] ?? Number.NaN));
  for (let cell = 0; cell < out.length; cell++) {
    const from = edges[cell]!;
    const to = edges[cell + 1]!;
    if (!(from >= t[0]! && to <= t[t.length - 1]!)) continue;
    while (k + 1 < t.length && t[k + 1]! <= from) k++;
    // About one value of the cell, so that a constant comes back as itself.
    const pivot = y[k]!;
    const integral = new CompensatedSum();
    for (let j = k; j + 1 < t.length && t[j]! < to; j++) {
      const a = Math.max(from, t[j]!);
      const b = Math.min(to, t[j + 1]!);
      integral.add((b - a) * onLine(t[j]!, y[j]! - pivot, t[j + 1]!, y[j + 1]! - pivot, a + (b - a) / 2));
    }
    out[cell] = pivot + integral.total / (to - from);
  }
  return out;
}
