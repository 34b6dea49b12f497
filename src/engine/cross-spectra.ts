import type { NodeSpectra, SegmentSpectrum } from "./node-spectra.ts";

/**
 * Sums of the segment spectra before (x), after (y) and removed (r = x - y) of one stage and channel, over
 * the segments that are gap-free on both sides. Since r = x - y holds segment by segment, one transform per
 * node serves all four terms: Gxx = Gyy + Grr + 2 Re Gyr.
 */
export class CrossSpectra {
  segments = 0;
  /** Sum over the segments of x's mean square, taken in time. */
  squareIn = 0;
  readonly xx: Float64Array;
  readonly yy: Float64Array;
  readonly rr: Float64Array;
  /** Re of conj(y) * r. */
  readonly yr: Float64Array;
  /** conj(x) * y: its ratio to xx is the gain that the data show. */
  readonly xyRe: Float64Array;
  readonly xyIm: Float64Array;
  private readonly turnRe: Float64Array | null;
  private readonly turnIm: Float64Array | null;
  private readonly waitingIn: Waiting = new Map();
  private readonly waitingOut: Waiting = new Map();

  /**
   * @param fraction  the part of the stage's delay that is not a whole number of samples, 0 <= fraction < 1:
   *                  y's spectrum is turned forward by it (a factor e^{j w fraction})
   */
  constructor(before: NodeSpectra, after: NodeSpectra, fraction: number) {
    const { bins, segment } = before.plan;
    this.xx = new Float64Array(bins);
    this.yy = new Float64Array(bins);
    this.rr = new Float64Array(bins);
    this.yr = new Float64Array(bins);
    this.xyRe = new Float64Array(bins);
    this.xyIm = new Float64Array(bins);
    if (fraction === 0) {
      this.turnRe = null;
      this.turnIm = null;
    } else {
      const angle = (k: number) => (2 * Math.PI * k * fraction) / segment;
      this.turnRe = Float64Array.from({ length: bins }, (_, k) => Math.cos(angle(k)));
      this.turnIm = Float64Array.from({ length: bins }, (_, k) => Math.sin(angle(k)));
    }
    // A segment is served first on the side that has its last sample first: taps that look ahead have the output's.
    before.listen((m, x) => {
      const y = this.waitingOut.get(m);
      dropUpTo(m, this.waitingOut);
      if (y === undefined) this.waitingIn.set(m, x);
      else if (x !== null && y !== null) this.add(x, y);
    });
    after.listen((m, y) => {
      const x = this.waitingIn.get(m);
      dropUpTo(m, this.waitingIn);
      if (x === undefined) this.waitingOut.set(m, y);
      else if (x !== null && y !== null) this.add(x, y);
    });
  }

  private add(x: SegmentSpectrum, y: SegmentSpectrum): void {
    const { xx, yy, rr, yr, xyRe, xyIm, turnRe, turnIm } = this;
    for (let k = 0; k < xx.length; k++) {
      const a = x.re[k]!;
      const b = x.im[k]!;
      let c = y.re[k]!;
      let d = y.im[k]!;
      if (turnRe !== null && turnIm !== null) {
        const re = c * turnRe[k]! - d * turnIm[k]!;
        d = c * turnIm[k]! + d * turnRe[k]!;
        c = re;
      }
      const e = a - c;
      const f = b - d;
      xx[k]! += a * a + b * b;
      yy[k]! += c * c + d * d;
      rr[k]! += e * e + f * f;
      yr[k]! += c * e + d * f;
      xyRe[k]! += a * c + b * d;
      xyIm[k]! += a * d - b * c;
    }
    this.squareIn += x.meanSquare;
    this.segments++;
  }
}

type Waiting = Map<number, SegmentSpectrum | null>;

/** Both sides serve in rising order, so what is not after segment m has no counterpart to come. */
function dropUpTo(m: number, waiting: Waiting): void {
  for (const key of waiting.keys()) {
    if (key > m) break;
    waiting.delete(key);
  }
}
