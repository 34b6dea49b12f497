/**
 * Polynomial in x = cos(2 pi f) through given points, in barycentric form.
 * References: J.-P. Berrut & L. N. Trefethen (2004), SIAM Review 46, 501-517, eq. 4.2 (second form). Recalled from
 * memory. Differences of cosines are made of half angles, cos a - cos b = 2 (sin(b/2) - sin(a/2)) (sin(b/2) +
 * sin(a/2)), so that nodes crowded at the ends of the range lose no digits.
 */
export class CosineInterpolant {
  private readonly frequencies: Float64Array;
  private readonly sines: Float64Array;
  private readonly cosines: Float64Array;
  /** 1 / product of (x_k - x_j), all scaled by one factor. */
  readonly weights: Float64Array;

  /** @param frequencies  distinct, cycles/sample, 0 to 0.5 */
  constructor(frequencies: Float64Array) {
    this.frequencies = frequencies;
    this.sines = frequencies.map((f) => Math.sin(Math.PI * f));
    this.cosines = frequencies.map(halfCosine);
    this.weights = this.barycentricWeights();
  }

  /** The polynomial with these values at the nodes, at another frequency. */
  at(f: number, values: Float64Array): number {
    const { sines, cosines, weights, frequencies } = this;
    const low = f < 0.25;
    const own = low ? Math.sin(Math.PI * f) : halfCosine(f);
    const theirs = low ? sines : cosines;
    let above = 0;
    let below = 0;
    for (let k = 0; k < weights.length; k++) {
      const node = theirs[k]!;
      const difference = (node - own) * (node + own);
      if (difference === 0) {
        if (frequencies[k] === f) return values[k]!;
        continue;
      }
      const share = weights[k]! / difference;
      above += share * values[k]!;
      below += share;
    }
    return above / below;
  }

  private barycentricWeights(): Float64Array {
    const { sines, cosines, frequencies } = this;
    const n = sines.length;
    const product = new Float64Array(n);
    /** Powers of two taken out of the products, which would leave the range of a double beyond some hundred nodes. */
    const exponent = new Float64Array(n);
    for (let k = 0; k < n; k++) {
      const theirs = frequencies[k]! < 0.25 ? sines : cosines;
      const sign = frequencies[k]! < 0.25 ? 1 : -1;
      const own = theirs[k]!;
      let p = 1;
      for (let j = 0; j < n; j++) {
        if (j === k) continue;
        // Times 4: the nodes then have a mean distance of about 1.
        p *= 4 * sign * (theirs[j]! - own) * (theirs[j]! + own);
        if (Math.abs(p) < 2 ** -400) {
          p *= 2 ** 400;
          exponent[k]! -= 400;
        } else if (Math.abs(p) > 2 ** 400) {
          p *= 2 ** -400;
          exponent[k]! += 400;
        }
      }
      product[k] = p;
    }
    let least = Number.POSITIVE_INFINITY;
    for (let k = 0; k < n; k++) least = Math.min(least, Math.log2(Math.abs(product[k]!)) + exponent[k]!);
    least = Math.round(least);
    return product.map((p, k) => 2 ** (least - exponent[k]!) / p);
  }
}

/** cos(pi f), to full relative precision near its zero at 0.5. */
const halfCosine = (f: number): number => Math.sin(Math.PI * (0.5 - f));
