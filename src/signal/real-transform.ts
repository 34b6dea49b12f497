/**
 * Discrete Fourier transform of real series, X[k] = sum of x[n] e^(-2 pi i k n / size), k = 0 … floor(size / 2).
 * Powers of two go straight to fft.js, any other size through the chirp-z algorithm.
 * References: two real series in one complex transform: J. W. Cooley, P. A. W. Lewis & P. D. Welch (1970),
 * Journal of Sound and Vibration 12, 315-337 (recalled from memory).
 */
import FFT from "fft.js";
import { ChirpTransform } from "./chirp-transform.ts";

/** Complex transform of interleaved data: re0, im0, re1, im1, … */
interface ComplexTransform {
  transform(out: Float64Array, input: Float64Array): void;
}

/** Work space is kept from call to call; nothing is allocated after the constructor. Not re-entrant. */
export class RealTransform {
  /** Samples in a series. */
  readonly size: number;
  /** Bins in a result: floor(size / 2) + 1. */
  readonly bins: number;
  private readonly complex: ComplexTransform;
  private readonly fft: FFT | null;
  private readonly input: Float64Array;
  private readonly out: Float64Array;

  /**
   * @param size  samples, a whole number >= 1; a power of two is fastest
   * @throws RangeError when size is not such
   */
  constructor(size: number) {
    if (!Number.isInteger(size) || size < 1)
      throw new RangeError(`transform size ${size} is not a whole number >= 1`);
    this.size = size;
    this.bins = Math.floor(size / 2) + 1;
    this.fft = size >= 2 && Number.isInteger(Math.log2(size)) ? new FFT(size) : null;
    this.complex = this.fft ?? new ChirpTransform(size);
    this.input = new Float64Array(2 * size);
    this.out = new Float64Array(2 * size);
  }

  /**
   * @param x       size samples, all finite
   * @param re, im  receive `bins` values each; im[0], and im[size / 2] of an even size, are exactly 0
   */
  transform(x: Float64Array, re: Float64Array, im: Float64Array): void {
    const { size, bins, input, out } = this;
    if (this.fft !== null) this.fft.realTransform(out, x);
    else {
      for (let n = 0; n < size; n++) {
        input[2 * n] = x[n]!;
        input[2 * n + 1] = 0;
      }
      this.complex.transform(out, input);
    }
    for (let k = 0; k < bins; k++) {
      re[k] = out[2 * k]!;
      im[k] = out[2 * k + 1]!;
    }
    this.clearRealBins(im);
  }

  /**
   * Transforms of two series by one complex transform of a + i b, in about the time of one.
   * Equal to `transform` of each only within rounding, not bit for bit: the error in either result is some
   * eps * log2(size) of the norm of the LARGER series, so a series that is many orders smaller than its
   * partner loses that many digits. Pair series of like size, and pair the same ones whenever the same bytes
   * are wanted.
   */
  transformPair(
    a: Float64Array,
    b: Float64Array,
    reA: Float64Array,
    imA: Float64Array,
    reB: Float64Array,
    imB: Float64Array,
  ): void {
    const { size, bins, input, out } = this;
    for (let n = 0; n < size; n++) {
      input[2 * n] = a[n]!;
      input[2 * n + 1] = b[n]!;
    }
    this.complex.transform(out, input);
    for (let k = 0; k < bins; k++) {
      // C[k] and C[size - k]: A is their Hermitian part, i B the anti-Hermitian one.
      const mirror = k === 0 ? 0 : 2 * (size - k);
      const r = out[2 * k]!;
      const i = out[2 * k + 1]!;
      const rm = out[mirror]!;
      const jm = out[mirror + 1]!;
      reA[k] = (r + rm) / 2;
      imA[k] = (i - jm) / 2;
      reB[k] = (i + jm) / 2;
      imB[k] = (rm - r) / 2;
    }
    this.clearRealBins(imA);
    this.clearRealBins(imB);
  }

  /** Bin 0 and the Nyquist bin of a real series are real; chirps leave rounding there, and -0 is no figure. */
  private clearRealBins(im: Float64Array): void {
    im[0] = 0;
    if (this.size % 2 === 0) im[this.size / 2] = 0;
  }
}
