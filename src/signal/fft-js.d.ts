/** fft.js ships no types. Complex arrays are interleaved: re0, im0, re1, im1, … (length 2·size). */
declare module "fft.js" {
  export default class FFT {
    /** size: a power of two, at least 2. */
    constructor(size: number);
    readonly size: number;
    createComplexArray(): number[];
    transform(out: ArrayLike<number>, input: ArrayLike<number>): void;
    realTransform(out: ArrayLike<number>, input: ArrayLike<number>): void;
    completeSpectrum(spectrum: ArrayLike<number>): void;
    inverseTransform(out: ArrayLike<number>, input: ArrayLike<number>): void;
  }
}
