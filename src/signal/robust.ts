/**
 * Median, median absolute deviation, and the Hampel identifier of outliers.
 * References: F. R. Hampel (1974), Journal of the American Statistical Association 69, 383-393 (median absolute
 * deviation); R. K. Pearson (2002), IEEE Transactions on Control Systems Technology 10, 55-63 (identifier over
 * a moving window); C. A. R. Hoare (1961), Communications of the ACM 4, 321-322 (selection). Recalled from
 * memory.
 */
import { SortedWindow } from "./sorted-window.ts";

/** Makes the median absolute deviation of Gaussian values their standard deviation: 1 / 0.6745, to five digits. */
export const HAMPEL_SCALE = 1.4826;

/** Middle value, or the mean of the two middle ones, of the values that are not NaN; NaN when there are none. */
export function median(x: ArrayLike<number>): number {
  const list = present(x);
  const n = list.length;
  if (n === 0) return Number.NaN;
  const half = n >>> 1;
  const upper = select(list, half);
  if (n % 2 === 1) return upper;
  let lower = Number.NEGATIVE_INFINITY;
  for (let i = 0; i < half; i++) if (list[i]! > lower) lower = list[i]!;
  return (lower + upper) / 2;
}

/** Median of |x - centre| over the values that are not NaN, not scaled; NaN when there are none. */
export function medianAbsoluteDeviation(x: ArrayLike<number>, centre = median(x)): number {
  const list = present(x);
  for (let i = 0; i < list.length; i++) list[i] = Math.abs(list[i]! - centre);
  return median(list);
}

function present(x: ArrayLike<number>): Float64Array {
  const list = new Float64Array(x.length);
  let n = 0;
  for (let i = 0; i < x.length; i++) if (!Number.isNaN(x[i]!)) list[n++] = x[i]!;
  return list.subarray(0, n);
}

/**
 * The k-th smallest value, by Hoare's selection about the median of three; the list is reordered so that
 * nothing before place k is larger. Falls back to sorting what is left when the pivots do badly.
 */
function select(list: Float64Array, k: number): number {
  let low = 0;
  let high = list.length - 1;
  for (let round = 0; low < high; round++) {
    if (round > 64) {
      list.subarray(low, high + 1).sort();
      break;
    }
    const a = list[low]!;
    const b = list[(low + high) >>> 1]!;
    const c = list[high]!;
    const pivot = Math.max(Math.min(a, b), Math.min(Math.max(a, b), c));
    let i = low;
    let j = high;
    while (i <= j) {
      while (list[i]! < pivot) i++;
      while (list[j]! > pivot) j--;
      if (i > j) break;
      const held = list[i]!;
      list[i++] = list[j]!;
      list[j--] = held;
    }
    if (k <= j) high = j;
    else if (k >= i) low = i;
    else break;
  }
  return list[k]!;
}

export interface HampelSettings {
  /** Scaled deviations beyond which (strictly) a value is an outlier, > 0. */
  readonly deviations: number;
  /**
   * Least scale, in the unit of the values, >= 0; 0 when left out. Where more than half the window is one
   * value the median absolute deviation is 0, and with a floor of 0 every other value there is an outlier:
   * half the quantisation step is a natural floor.
   */
  readonly floor?: number;
  /** At the ends, where the window is not full: judge nothing (`blank`), or by the part inside. */
  readonly ends: "blank" | "part-window";
}

export interface HampelFigures {
  /** Median of the window of each value; NaN where it is not judged. */
  readonly medians: Float64Array;
  /** HAMPEL_SCALE times the window's median absolute deviation, before the floor; NaN where not judged. */
  readonly scales: Float64Array;
  /** 1 for an outlier: |x - median| > deviations * max(scale, floor). */
  readonly outliers: Uint8Array;
}

/**
 * Hampel identifier over the 2 halfWidth + 1 samples around each. NaN samples hold their places but no value,
 * and are not judged.
 * @param halfWidth  whole number >= 1
 */
export function hampelByCount(x: Float64Array, halfWidth: number, settings: HampelSettings): HampelFigures {
  if (!(Number.isInteger(halfWidth) && halfWidth >= 1))
    throw new RangeError(`half-width of ${halfWidth} samples is not a whole number >= 1`);
  const n = x.length;
  return sweep(
    x,
    settings,
    (i, j) => j - i <= halfWidth,
    (i, j) => i - j > halfWidth,
    (i) => i >= halfWidth && i + halfWidth < n,
  );
}

/**
 * Hampel identifier over the samples at most halfSpan away in time, on either side.
 * @param t         times, not falling, of the same length as x
 * @param halfSpan  > 0, in the unit of t
 */
export function hampelByTime(
  t: Float64Array,
  x: Float64Array,
  halfSpan: number,
  settings: HampelSettings,
): HampelFigures {
  if (!(halfSpan > 0)) throw new RangeError(`half-span ${halfSpan} is not > 0`);
  const last = t[t.length - 1]!;
  return sweep(
    x,
    settings,
    (i, j) => t[j]! - t[i]! <= halfSpan,
    (i, j) => t[i]! - t[j]! > halfSpan,
    (i) => t[i]! - t[0]! >= halfSpan && last - t[i]! >= halfSpan,
  );
}

/** One sweep: samples enter the window ahead and leave it behind, each once. */
function sweep(
  x: Float64Array,
  { deviations, floor = 0, ends }: HampelSettings,
  reaches: (i: number, ahead: number) => boolean,
  leaves: (i: number, behind: number) => boolean,
  full: (i: number) => boolean,
): HampelFigures {
  if (!(deviations > 0)) throw new RangeError(`${deviations} deviations are not > 0`);
  if (!(floor >= 0)) throw new RangeError(`least scale ${floor} is not >= 0`);
  const n = x.length;
  const medians = new Float64Array(n).fill(Number.NaN);
  const scales = new Float64Array(n).fill(Number.NaN);
  const outliers = new Uint8Array(n);
  const window = new SortedWindow();
  let first = 0;
  let next = 0;
  for (let i = 0; i < n; i++) {
    for (; next < n && reaches(i, next); next++) if (!Number.isNaN(x[next]!)) window.add(x[next]!);
    for (; leaves(i, first); first++) if (!Number.isNaN(x[first]!)) window.remove(x[first]!);
    if (Number.isNaN(x[i]!) || (ends === "blank" && !full(i))) continue;
    const centre = window.median();
    const scale = HAMPEL_SCALE * window.medianAbsoluteDeviation();
    medians[i] = centre;
    scales[i] = scale;
    if (Math.abs(x[i]! - centre) > deviations * Math.max(scale, floor)) outliers[i] = 1;
  }
  return { medians, scales, outliers };
}
