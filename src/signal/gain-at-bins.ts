import { RealTransform } from "./real-transform.ts";

/**
 * Complex response of taps at the bins k / size (cycles/sample), k = 0 … size / 2. Taps beyond `size` are
 * wrapped round, which samples the response exactly at these frequencies (aliasing in time).
 */
export function responseAtBins(taps: Float64Array, size: number): { re: Float64Array; im: Float64Array } {
  const wrapped = new Float64Array(size);
  for (let n = 0; n < taps.length; n++) wrapped[n % size]! += taps[n]!;
  const re = new Float64Array(size / 2 + 1);
  const im = new Float64Array(size / 2 + 1);
  new RealTransform(size).transform(wrapped, re, im);
  return { re, im };
}

/** |H| at the bins k / size, k = 0 … size / 2. */
export function gainAtBins(taps: Float64Array, size: number): Float64Array {
  const { re, im } = responseAtBins(taps, size);
  return re.map((a, k) => Math.hypot(a, im[k]!));
}
