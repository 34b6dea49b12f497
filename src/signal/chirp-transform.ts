/**
 * Complex discrete Fourier transform of any size, as a convolution with a chirp over a power of two:
 * k n = (k^2 + n^2 - (k - n)^2) / 2, so X[k] = c[k] * sum of (x[n] c[n]) conj(c[k - n]), c[k] = e^(-pi i k^2 / size).
 * References: L. I. Bluestein (1970), IEEE Transactions on Audio and Electroacoustics 18, 451-455 (recalled
 * from memory).
 */
import FFT from "fft.js";

export class ChirpTransform {
  readonly size: number;
  private readonly fft: FFT;
  private readonly chirp: Float64Array;
  /** Transform of the conjugate chirp, wrapped round. */
  private readonly kernel: Float64Array;
  private readonly work: Float64Array;
  private readonly out: Float64Array;

  /** @param size  whole number from 1 to 2^26 (k^2 must stay exact) */
  constructor(size: number) {
    if (!Number.isInteger(size) || size < 1 || size > 2 ** 26)
      throw new RangeError(`chirp transform size ${size} is not a whole number from 1 to 2^26`);
    this.size = size;
    let length = 2;
    while (length < 2 * size - 1) length *= 2;
    this.fft = new FFT(length);
    this.chirp = new Float64Array(2 * size);
    for (let k = 0; k < size; k++) {
      // k^2 modulo 2 size keeps the angle small, so that it is right to the last digits.
      const angle = (Math.PI * ((k * k) % (2 * size))) / size;
      this.chirp[2 * k] = Math.cos(angle);
      this.chirp[2 * k + 1] = -Math.sin(angle);
    }
    this.work = new Float64Array(2 * length);
    this.out = new Float64Array(2 * length);
    this.kernel = new Float64Array(2 * length);
    for (let k = 0; k < size; k++)
      for (const at of k === 0 ? [0] : [k, length - k]) {
        this.work[2 * at] = this.chirp[2 * k]!;
        this.work[2 * at + 1] = -this.chirp[2 * k + 1]!;
      }
    this.fft.transform(this.kernel, this.work);
  }

  /** Interleaved re0, im0, re1, im1, …; both arrays hold 2 * size numbers. Nothing is allocated. */
  transform(out: Float64Array, input: Float64Array): void {
    const { size, fft, chirp, kernel, work, out: spectrum } = this;
    work.fill(0);
    multiply(work, input, chirp, size);
    fft.transform(spectrum, work);
    multiply(spectrum, spectrum, kernel, fft.size);
    fft.inverseTransform(work, spectrum);
    multiply(out, work, chirp, size);
  }
}

/** out[k] = a[k] * b[k], `count` complex numbers; out may be a. */
function multiply(out: Float64Array, a: Float64Array, b: Float64Array, count: number): void {
  for (let k = 0; k < 2 * count; k += 2) {
    const re = a[k]! * b[k]! - a[k + 1]! * b[k + 1]!;
    const im = a[k]! * b[k + 1]! + a[k + 1]! * b[k]!;
    out[k] = re;
    out[k + 1] = im;
  }
}
