/**
 * Discrete Fourier transform of a real series, X[k] = sum of x[n] e^(-2 pi i k n / size), k = 0 … size / 2.
 * Powers of two go to fft.js; any other size by the chirp-z algorithm, over a power of two.
 * References: L. I. Bluestein (1970), IEEE Transactions on Audio and Electroacoustics 18, 451-455 (recalled
 * from memory).
 */
import FFT from "fft.js";

export class RealTransform {
  readonly size: number;
  /** Number of bins: floor(size / 2) + 1. */
  readonly bins: number;
  private readonly inner: { transform(x: Float64Array, re: Float64Array, im: Float64Array): void };

  /** @param size  samples, at least 1 */
  constructor(size: number) {
    if (!Number.isInteger(size) || size < 1) throw new RangeError(`transform size ${size} is not a positive integer`);
    this.size = size;
    this.bins = Math.floor(size / 2) + 1;
    this.inner = size >= 2 && Number.isInteger(Math.log2(size)) ? new PowerOfTwo(size) : new ChirpZ(size);
  }

  /** x has `size` samples; re and im receive `bins` values. Nothing is allocated. */
  transform(x: Float64Array, re: Float64Array, im: Float64Array): void {
    this.inner.transform(x, re, im);
  }
}

class PowerOfTwo {
  private readonly fft: FFT;
  private readonly out: number[];

  constructor(size: number) {
    this.fft = new FFT(size);
    this.out = this.fft.createComplexArray();
  }

  transform(x: Float64Array, re: Float64Array, im: Float64Array): void {
    this.fft.realTransform(this.out, x);
    const bins = this.fft.size / 2 + 1;
    for (let k = 0; k < bins; k++) {
      re[k] = this.out[2 * k]!;
      im[k] = this.out[2 * k + 1]!;
    }
  }
}

class ChirpZ {
  private readonly size: number;
  private readonly fft: FFT;
  private readonly chirpRe: Float64Array;
  private readonly chirpIm: Float64Array;
  private readonly kernel: number[];
  private readonly work: number[];
  private readonly out: number[];

  constructor(size: number) {
    this.size = size;
    const n = 2 ** Math.max(1, Math.ceil(Math.log2(2 * size - 1)));
    this.fft = new FFT(n);
    // k^2 modulo 2 * size keeps the angle small, and so exact to the last digits.
    const angle = (k: number) => (Math.PI * ((k * k) % (2 * size))) / size;
    this.chirpRe = Float64Array.from({ length: size }, (_, k) => Math.cos(angle(k)));
    this.chirpIm = Float64Array.from({ length: size }, (_, k) => -Math.sin(angle(k)));
    const chirp = this.fft.createComplexArray().fill(0);
    for (let k = 0; k < size; k++)
      for (const at of k === 0 ? [0] : [k, n - k]) {
        chirp[2 * at] = this.chirpRe[k]!;
        chirp[2 * at + 1] = -this.chirpIm[k]!;
      }
    this.kernel = this.fft.createComplexArray();
    this.fft.transform(this.kernel, chirp);
    this.work = this.fft.createComplexArray();
    this.out = this.fft.createComplexArray();
  }

  transform(x: Float64Array, re: Float64Array, im: Float64Array): void {
    const { size, work, out, kernel, chirpRe, chirpIm } = this;
    work.fill(0);
    for (let k = 0; k < size; k++) {
      work[2 * k] = x[k]! * chirpRe[k]!;
      work[2 * k + 1] = x[k]! * chirpIm[k]!;
    }
    this.fft.transform(out, work);
    for (let k = 0; k < out.length; k += 2) {
      const a = out[k]!;
      const b = out[k + 1]!;
      out[k] = a * kernel[k]! - b * kernel[k + 1]!;
      out[k + 1] = a * kernel[k + 1]! + b * kernel[k]!;
    }
    this.fft.inverseTransform(work, out);
    for (let k = 0; k <= size / 2; k++) {
      const a = work[2 * k]!;
      const b = work[2 * k + 1]!;
      re[k] = a * chirpRe[k]! - b * chirpIm[k]!;
      im[k] = a * chirpIm[k]! + b * chirpRe[k]!;
    }
  }
}
