/**
 * Upper tail of a spectral estimate from overlapping segments of noise. Equivalent degrees of freedom give the
 * estimate's variance; its upper tail is heavier than chi-square's with as many, since the segments' common
 * part counts more there: at a chance of 1e-7 by half for Hann segments with half overlap, fourfold for flat
 * ones. The estimate is a sum of exponentials weighted with the eigenvalues of the segments' correlation.
 * References: U. Grenander & G. Szegő (1958), Toeplitz Forms and Their Applications (eigenvalues from the
 * symbol, exact where only neighbours overlap); R. Lugannani & S. Rice (1980), Advances in Applied Probability
 * 12, 475-490 (saddlepoint approximation of tails). Recalled from memory. The chi-square tail is multiplied by
 * the ratio of the two saddlepoint tails, whose errors nearly cancel.
 */
import { gammaQ } from "./incomplete-gamma.ts";
import { overlapCorrelation } from "./windows.ts";

const MOST_EIGENVALUES = 64;
/** Nearer to the mean the two tails do not differ, and the formula is 0 / 0. */
const NEAREST = 1.05;

export class OverlapTail {
  private readonly dof: number;
  /** Eigenvalues of the segments' correlation, about their mean of 1. */
  private readonly eigenvalues: Float64Array;
  /** Segments that each eigenvalue stands for. */
  private readonly weight: number;
  private readonly segments: number;

  /**
   * @param window  coefficients of a segment, periodic form
   * @param hop     samples from one segment's start to the next, >= 1
   * @param dof     equivalent degrees of freedom of the estimate, > 0; the number of segments follows from it
   */
  constructor(window: Float64Array, hop: number, dof: number) {
    this.dof = dof;
    const correlations: number[] = [];
    for (let j = 1; j * hop < window.length; j++) correlations.push(overlapCorrelation(window, j * hop));
    // Welch's formula solved for the number of segments: 2 K^2 - dof (1 + 2 A) K + 2 dof B = 0.
    const a = correlations.reduce((s, r) => s + r * r, 0);
    const b = correlations.reduce((s, r, i) => s + (i + 1) * r * r, 0);
    const middle = (dof * (1 + 2 * a)) / 4;
    this.segments = Math.max(1, middle + Math.sqrt(Math.max(0, middle * middle - dof * b)));
    const count = Math.min(MOST_EIGENVALUES, Math.round(this.segments));
    this.weight = this.segments / count;
    this.eigenvalues = Float64Array.from({ length: count }, (_, i) => {
      let f = 1;
      for (const [j, r] of correlations.entries())
        f += 2 * r * Math.cos((Math.PI * (j + 1) * (i + 1)) / (count + 1));
      return Math.max(1e-9, f);
    });
    const mean = this.eigenvalues.reduce((s, f) => s + f, 0) / count;
    for (let i = 0; i < count; i++) this.eigenvalues[i]! /= mean;
  }

  /** Chance that the estimate exceeds x times the density, x >= 0. */
  above(x: number): number {
    const half = this.dof / 2;
    const chiSquare = gammaQ(half, half * x);
    if (!(x > NEAREST) || chiSquare === 0) return chiSquare;
    const plain = tail(Math.sqrt(2 * half * (x - 1 - Math.log(x))), Math.sqrt(half) * (x - 1));
    const { eigenvalues, weight, segments } = this;
    const s = this.saddlepoint(x);
    let cumulant = 0;
    let curvature = 0;
    for (const f of eigenvalues) {
      cumulant -= weight * Math.log1p(-s * f);
      curvature += weight * (f / segments / (1 - s * f)) ** 2;
    }
    const theta = s * segments;
    const overlapped = tail(Math.sqrt(2 * Math.max(0, theta * x - cumulant)), theta * Math.sqrt(curvature));
    return Math.min(1, (chiSquare * overlapped) / plain);
  }

  /** s > 0 where the mean under exponential tilting by segments * s is x. */
  private saddlepoint(x: number): number {
    let low = 0;
    let high = 1 / this.eigenvalues.reduce((m, f) => Math.max(m, f), 0);
    let s = high * (1 - 1 / x);
    for (let i = 0; i < 100; i++) {
      let mean = 0;
      let slope = 0;
      for (const f of this.eigenvalues) {
        const part = (this.weight * f) / this.segments / (1 - s * f);
        mean += part;
        slope += (part * f) / (1 - s * f);
      }
      if (mean < x) low = s;
      else high = s;
      const next = s + (x - mean) / slope;
      if (Math.abs(next - s) <= 1e-13 * s) break;
      s = next > low && next < high ? next : (low + high) / 2;
    }
    return s;
  }
}

/** Lugannani & Rice: 1 - Phi(w) + phi(w) (1 / u - 1 / w). */
function tail(w: number, u: number): number {
  const phi = Math.exp((-w * w) / 2) / Math.sqrt(2 * Math.PI);
  return gammaQ(0.5, (w * w) / 2) / 2 + phi * (1 / u - 1 / w);
}
