/**
 * Response of taps at evenly spaced frequencies of any start and step, all at once: the sum over n of
 * h[n] e^(-2 pi i (from + m step) n) as a convolution with a chirp, by m n = (m^2 + n^2 - (m - n)^2) / 2.
 * Reference: L. R. Rabiner, R. W. Schafer & C. M. Rader (1969), IEEE Transactions on Audio and Electroacoustics
 * 17, 86-92 (recalled from memory).
 */
import FFT from "fft.js";

/**
 * |H| at from + m * step cycles/sample, m = 0 … count - 1. Rounding is about 1e-11 of sum |h|, more than that of
 * the direct sum: seek with this, then state the figure of the direct sum.
 */
export function gainsOnLine(taps: Float64Array, from: number, step: number, count: number): Float64Array {
  const n = taps.length;
  let size = 2;
  while (size < n + count - 1) size *= 2;
  const fft = new FFT(size);
  const a = new Float64Array(2 * size);
  const b = new Float64Array(2 * size);
  const spectrum = new Float64Array(2 * size);
  const kernel = new Float64Array(2 * size);
  const chirp = (k: number) => 2 * Math.PI * ((k * k * (step / 2)) % 1);
  for (let k = 0; k < n; k++) {
    const angle = -2 * Math.PI * ((from * k) % 1) - chirp(k);
    a[2 * k] = taps[k]! * Math.cos(angle);
    a[2 * k + 1] = taps[k]! * Math.sin(angle);
  }
  for (let k = 0; k < Math.max(n, count); k++) {
    const re = Math.cos(chirp(k));
    const im = Math.sin(chirp(k));
    if (k < count) {
      b[2 * k] = re;
      b[2 * k + 1] = im;
    }
    if (k > 0 && k < n) {
      b[2 * (size - k)] = re;
      b[2 * (size - k) + 1] = im;
    }
  }
  fft.transform(spectrum, a);
  fft.transform(kernel, b);
  for (let k = 0; k < 2 * size; k += 2) {
    const re = spectrum[k]! * kernel[k]! - spectrum[k + 1]! * kernel[k + 1]!;
    spectrum[k + 1] = spectrum[k]! * kernel[k + 1]! + spectrum[k + 1]! * kernel[k]!;
    spectrum[k] = re;
  }
  fft.inverseTransform(a, spectrum);
  return Float64Array.from({ length: count }, (_, m) => Math.hypot(a[2 * m]!, a[2 * m + 1]!));
}
