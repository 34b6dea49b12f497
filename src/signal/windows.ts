/**
 * Windows for filter design (symmetric form) and spectra (periodic form).
 * References: F. J. Harris (1978), Proceedings of the IEEE 66, 51-83 (forms and names); J. F. Kaiser (1974),
 * Proceedings of IEEE ISCAS, 20-23 (Kaiser window); G. D'Antona & A. Ferrero (2006), Digital Signal Processing
 * for Measurement Systems, Springer, chapter 3 (the five-term flat-top). Recalled from memory; the values are
 * checked against closed forms evaluated to 30 digits, the flat-top by its own figures.
 */
import { besselI0 } from "./kaiser.ts";

export type WindowKind =
  | "rectangular"
  | "triangular"
  | "hann"
  | "hamming"
  | "blackman"
  | "kaiser"
  | "flat-top";

/** Largest beta for which the Bessel function stays within the range of a double. */
const LARGEST_BETA = 700;

/** Cosine terms of the flat-top, with alternating signs: its top is level to 0.01 dB over a bin. For spectra only. */
const FLAT_TOP = [0.21557895, 0.41663158, 0.277263158, 0.083578947, 0.006947368] as const;

/**
 * @param kind    triangular has zero end points; blackman is the 0.42, 0.50, 0.08 form
 * @param length  at least 1; length 1 gives [1] for every window
 * @param form    symmetric: w[n] = w[length - 1 - n]; periodic: the first `length` points of length + 1
 * @param beta    shape of the Kaiser window, 0 to 700
 * @throws RangeError when length or beta is out of its range
 */
export function windowCoefficients(
  kind: WindowKind,
  length: number,
  form: "symmetric" | "periodic",
  beta = 0,
): Float64Array {
  if (!(Number.isInteger(length) && length >= 1))
    throw new RangeError(`window of ${length} points: not a whole number >= 1`);
  if (!(beta >= 0 && beta <= LARGEST_BETA))
    throw new RangeError(`beta ${beta} is not in 0 to ${LARGEST_BETA}`);
  const w = new Float64Array(length);
  if (length === 1) return w.fill(1);
  const last = form === "symmetric" ? length - 1 : length;
  const scale = kind === "kaiser" ? besselI0(beta) : 1;
  for (let n = 0; n < length; n++) {
    // Both halves from the same places, so that the window is symmetric to the last bit.
    const m = Math.min(n, last - n);
    w[n] = point(kind, m, last, beta, scale);
  }
  return w;
}

function point(kind: WindowKind, m: number, last: number, beta: number, scale: number): number {
  const a = (2 * Math.PI * m) / last;
  switch (kind) {
    case "rectangular":
      return 1;
    case "triangular":
      return (2 * m) / last;
    case "hann":
      return Math.sin(a / 2) ** 2;
    case "hamming":
      return 0.54 - 0.46 * Math.cos(a);
    case "blackman":
      // Exactly nothing at the end, where the three terms leave rounding.
      return m === 0 ? 0 : 0.42 - 0.5 * Math.cos(a) + 0.08 * Math.cos(2 * a);
    case "kaiser": {
      const r = (2 * m) / last - 1;
      return besselI0(beta * Math.sqrt(Math.max(0, 1 - r * r))) / scale;
    }
    case "flat-top":
      return FLAT_TOP.reduce((sum, c, k) => sum + (k % 2 === 0 ? c : -c) * Math.cos(k * a), 0);
  }
}

/** Mean of the window, and its equivalent noise bandwidth in bins: N * sum w^2 / (sum w)^2 (Harris 1978, eq. 11). */
export function windowFigures(w: Float64Array): { coherentGain: number; enbwBins: number } {
  let sum = 0;
  let square = 0;
  for (const x of w) {
    sum += x;
    square += x * x;
  }
  return { coherentGain: sum / w.length, enbwBins: (w.length * square) / (sum * sum) };
}

/** Correlation of the window with itself shifted by `hop`, as a share of its energy (Harris 1978, eq. 17). */
export function overlapCorrelation(w: Float64Array, hop: number): number {
  let shifted = 0;
  let square = 0;
  for (let n = 0; n < w.length; n++) {
    square += w[n]! * w[n]!;
    if (n + hop < w.length) shifted += w[n]! * w[n + hop]!;
  }
  return shifted / square;
}
