/**
 * Piecewise cubics through samples, from slopes at the samples that depend on near neighbours only. Abscissae
 * rise strictly; nothing is put outside the first and the last of them (NaN there).
 * References: F. N. Fritsch & J. Butland (1984), SIAM Journal on Scientific and Statistical Computing 5,
 * 300-304 (monotone slopes); C. de Boor (1978), A Practical Guide to Splines, chapter IV (Hermite form,
 * parabolic slopes); E. Catmull & R. Rom (1974), in Computer Aided Geometric Design, 317-326 (the even case);
 * H. Akima (1970), Journal of the ACM 17, 589-602. Recalled from memory.
 */
import { bracketBelow } from "./interpolation.ts";

/** Cubic with values y0, y1 and slopes d0, d1 at t0 < t1; exactly y0 and y1 there. */
export function hermiteCubic(
  t0: number,
  y0: number,
  d0: number,
  t1: number,
  y1: number,
  d1: number,
  at: number,
): number {
  if (at === t1) return y1;
  const h = t1 - t0;
  const s = at - t0;
  const m = (y1 - y0) / h;
  const c2 = (3 * m - 2 * d0 - d1) / h;
  const c3 = (d0 + d1 - 2 * m) / (h * h);
  return y0 + s * (d0 + s * (c2 + s * c3));
}

/** The piecewise cubic with the given slopes. */
export function cubicAt(t: Float64Array, y: Float64Array, slopes: Float64Array, at: number): number {
  const k = bracketBelow(t, at);
  if (k < 0 || !(at <= t[t.length - 1]!)) return Number.NaN;
  if (at === t[k]) return y[k]!;
  return hermiteCubic(t[k]!, y[k]!, slopes[k]!, t[k + 1]!, y[k + 1]!, slopes[k + 1]!, at);
}

/**
 * Slopes of the monotone cubic (PCHIP) inside: the weighted harmonic mean of the two chords (Fritsch & Butland
 * 1984, eq. 5), 0 at a turning point. The cubic never leaves the range of the two samples it lies between.
 * @param h0, m0  length and slope of the chord before
 * @param h1, m1  of the chord after
 */
export function monotoneSlope(h0: number, m0: number, h1: number, m1: number): number {
  // Signs compared, not multiplied: the product of two small slopes may underflow.
  if (m0 === 0 || m1 === 0 || m0 > 0 !== m1 > 0) return 0;
  const w0 = 2 * h1 + h0;
  const w1 = h1 + 2 * h0;
  return (w0 + w1) / (w0 / m0 + w1 / m1);
}

/** Slope of the monotone cubic at an end: three-point formula, cut so that the end stays monotone. */
export function monotoneEndSlope(h0: number, m0: number, h1: number, m1: number): number {
  const d = ((2 * h0 + h1) * m0 - h0 * m1) / (h0 + h1);
  if (Math.sign(d) !== Math.sign(m0)) return 0;
  return Math.sign(m0) !== Math.sign(m1) && Math.abs(d) > 3 * Math.abs(m0) ? 3 * m0 : d;
}

/** Slopes of the monotone cubic; of two samples the chord's, of one 0. */
export function monotoneCubicSlopes(t: Float64Array, y: Float64Array): Float64Array {
  return slopesFrom(t, y, monotoneSlope, monotoneEndSlope);
}

/**
 * Slopes of the local cubic: at each sample that of the parabola through it and its two neighbours (de Boor's
 * "Bessel" choice; with even samples Catmull & Rom's), at the ends that of the last parabola. Linear in the
 * values, exact for parabolas; it may overshoot.
 */
export function localCubicSlopes(t: Float64Array, y: Float64Array): Float64Array {
  return slopesFrom(
    t,
    y,
    (h0, m0, h1, m1) => (h1 * m0 + h0 * m1) / (h0 + h1),
    (h0, m0, h1, m1) => m0 + (h0 * (m0 - m1)) / (h0 + h1),
  );
}

function slopesFrom(
  t: Float64Array,
  y: Float64Array,
  inside: (h0: number, m0: number, h1: number, m1: number) => number,
  end: (h0: number, m0: number, h1: number, m1: number) => number,
): Float64Array {
  const n = t.length;
  const slopes = new Float64Array(n);
  const h = (k: number) => t[k + 1]! - t[k]!;
  const m = (k: number) => (y[k + 1]! - y[k]!) / h(k);
  if (n === 2) slopes.fill(m(0));
  if (n < 3) return slopes;
  slopes[0] = end(h(0), m(0), h(1), m(1));
  for (let k = 1; k < n - 1; k++) slopes[k] = inside(h(k - 1), m(k - 1), h(k), m(k));
  slopes[n - 1] = end(h(n - 2), m(n - 2), h(n - 3), m(n - 3));
  return slopes;
}

/**
 * Akima's slopes: the chords on either side weighted by how little the chords beyond them turn, their mean
 * where neither side turns; chords beyond the ends by Akima's parabola. Not linear in the values; overshoots
 * less than the parabolas next to a step.
 */
export function akimaSlopes(t: Float64Array, y: Float64Array): Float64Array {
  const n = t.length;
  const slopes = new Float64Array(n);
  if (n < 2) return slopes;
  // Chord k lies at m[k + 2].
  const m = new Float64Array(n + 3);
  for (let k = 0; k < n - 1; k++) m[k + 2] = (y[k + 1]! - y[k]!) / (t[k + 1]! - t[k]!);
  if (n === 2) return slopes.fill(m[2]!);
  m[1] = 2 * m[2]! - m[3]!;
  m[0] = 2 * m[1]! - m[2]!;
  m[n + 1] = 2 * m[n]! - m[n - 1]!;
  m[n + 2] = 2 * m[n + 1]! - m[n]!;
  for (let k = 0; k < n; k++) {
    const before = Math.abs(m[k + 1]! - m[k]!);
    const after = Math.abs(m[k + 3]! - m[k + 2]!);
    slopes[k] =
      before + after > 0
        ? (after * m[k + 1]! + before * m[k + 2]!) / (before + after)
        : (m[k + 1]! + m[k + 2]!) / 2;
  }
  return slopes;
}
