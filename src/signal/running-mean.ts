/**
 * Mean of a sliding window in constant time a sample, without the error that a running sum carries on.
 *
 * The axis is cut into blocks of the window's length, anchored to the absolute sample index. A window that
 * starts inside block b is the end of block b plus the start of block b + 1: one backward and one forward
 * cumulative sum, both made only of samples inside the window, so a huge sample leaves no trace once it
 * has left. Sums are compensated (error-free addition), so the mean is right to about one rounding.
 *
 * References: M. van Herk (1992), Pattern Recognition Letters 13, 517-521 and J. Gil & M. Werman (1993),
 * IEEE PAMI 15, 504-507: the same two-sided blocks for running extremes; D. E. Knuth, The Art of Computer
 * Programming vol. 2, 4.2.2 theorem B: error-free addition. Recalled from memory.
 */

/**
 * out[outStart + o] = mean of x[start + o … start + o + n - 1], o = 0 … count - 1.
 * @param startIndex  absolute sample index of x[start]; fixes the blocks
 */
export function runningMean(
  x: Float64Array,
  start: number,
  startIndex: number,
  n: number,
  out: Float64Array,
  outStart: number,
  count: number,
): void {
  const high = new Float64Array(n);
  const low = new Float64Array(n);
  let o = 0;
  while (o < count) {
    const s = startIndex + o;
    const blockStart = Math.floor(s / n) * n;
    const inBlock = s - blockStart;
    const here = Math.min(count - o, n - inBlock);
    const base = start + o - inBlock; // place in x of the block's first sample
    let hi = 0;
    let lo = 0;
    for (let i = n - 1; i >= inBlock; i--) {
      const v = x[base + i]!;
      const sum = hi + v;
      const part = sum - hi;
      lo += hi - (sum - part) + (v - part);
      hi = sum;
      high[i] = hi;
      low[i] = lo;
    }
    // Forward sums of the next block start at its first sample even when the window starts further on.
    let ph = 0;
    let pl = 0;
    for (let i = 0; i < inBlock - 1 + here; i++) {
      if (i >= inBlock) {
        const k = i;
        out[outStart + o + k - inBlock] = quotient(high[k]!, low[k]!, ph, pl, n);
      }
      const v = x[base + n + i]!;
      const sum = ph + v;
      const part = sum - ph;
      pl += ph - (sum - part) + (v - part);
      ph = sum;
    }
    const k = inBlock + here - 1;
    out[outStart + o + k - inBlock] = quotient(high[k]!, low[k]!, ph, pl, n);
    o += here;
  }
}

/** (a + b) / n, where a and b are each held as a rounded sum and what the rounding lost. */
function quotient(ah: number, al: number, bh: number, bl: number, n: number): number {
  const sum = ah + bh;
  const part = sum - ah;
  const low = ah - (sum - part) + (bh - part) + (al + bl);
  const q = sum / n;
  // Without the remainder, three times 0.1 divided by three would not be 0.1 again.
  const product = q * n;
  const rest = sum - product - productError(q, n, product) + low;
  const mean = q + rest / n;
  return Number.isFinite(mean) ? mean : q;
}

/** What rounding lost in a * b (T. J. Dekker 1971, Numerische Mathematik 18, 224-242; recalled from memory). */
function productError(a: number, b: number, product: number): number {
  const ca = 134217729 * a;
  const ah = ca - (ca - a);
  const al = a - ah;
  const cb = 134217729 * b;
  const bh = cb - (cb - b);
  const bl = b - bh;
  return al * bl - (product - ah * bh - al * bh - ah * bl);
}
