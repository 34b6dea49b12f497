/**
 * Dot products of a sliding window. Every output sums its taps in the same order, oldest sample first,
 * whatever the neighbours, so results do not depend on how the work was cut up.
 */

/**
 * out[o] = sum over i of weights[i] * x[start + o * step + i], for o = 0 … count - 1.
 * @param weights  in order of time: weights[0] meets the oldest sample of the window
 */
export function slidingDot(
  x: Float64Array,
  start: number,
  step: number,
  weights: Float64Array,
  out: Float64Array,
  outStart: number,
  count: number,
): void {
  const n = weights.length;
  let o = 0;
  // Four outputs at a time keep four independent sums in registers; each one's own order stays the same.
  for (; o + 4 <= count; o += 4) {
    const a = start + o * step;
    const b = a + step;
    const c = b + step;
    const d = c + step;
    let sa = 0;
    let sb = 0;
    let sc = 0;
    let sd = 0;
    for (let i = 0; i < n; i++) {
      const w = weights[i]!;
      sa += w * x[a + i]!;
      sb += w * x[b + i]!;
      sc += w * x[c + i]!;
      sd += w * x[d + i]!;
    }
    out[outStart + o] = sa;
    out[outStart + o + 1] = sb;
    out[outStart + o + 2] = sc;
    out[outStart + o + 3] = sd;
  }
  for (; o < count; o++) {
    const a = start + o * step;
    let sum = 0;
    for (let i = 0; i < n; i++) sum += weights[i]! * x[a + i]!;
    out[outStart + o] = sum;
  }
}

/** Full linear convolution, length a + b - 1; used to combine the taps of filters in series. */
export function convolveTaps(a: Float64Array, b: Float64Array): Float64Array {
  const out = new Float64Array(a.length + b.length - 1);
  for (let i = 0; i < a.length; i++) for (let j = 0; j < b.length; j++) out[i + j]! += a[i]! * b[j]!;
  return out;
}
