/**
 * Largest and smallest gain of a filter on intervals of frequency, in cycles/sample.
 * Method: |H|^2 is a trigonometric polynomial of degree N - 1, so its extremes are about 1/(2N) apart or more.
 * It is sampled at 16 points a tap; each local extreme whose parabola says that it could win is then climbed
 * on the direct sum (successive parabolic interpolation; R. P. Brent (1973), Algorithms for Minimization
 * Without Derivatives, chapter 5; recalled from memory).
 */
import { gainAt } from "./frequency-response.ts";
import { responseAtBins } from "./gain-at-bins.ts";

export interface GainPoint {
  readonly gain: number;
  /** Cycles/sample. */
  readonly frequency: number;
}

/** Points a tap over 0 to 0.5. */
const POINTS_PER_TAP = 16;
/** How far a parabola through three points may fall short of the extreme, as a share of their spread. */
const PARABOLA_DOUBT = 0.05;

/** The gain of one filter, sampled once and then asked for many intervals. */
export class GainCurve {
  readonly taps: Float64Array;
  /** |H|^2 at k / size, k = 0 … size / 2. */
  readonly power: Float64Array;
  /** A power of two. */
  readonly size: number;
  /** Rounding of a response computed by sums: eps * sum |h|. */
  private readonly rounding: number;

  constructor(taps: Float64Array) {
    this.taps = taps;
    this.size = 2 ** Math.ceil(Math.log2(Math.max(256, 2 * POINTS_PER_TAP * taps.length)));
    const { re, im } = responseAtBins(taps, this.size);
    this.power = re.map((a, k) => a * a + im[k]! * im[k]!);
    this.rounding = Number.EPSILON * taps.reduce((sum, w) => sum + Math.abs(w), 0);
  }

  /** Largest gain on [from, to], end points included. */
  peak(from: number, to: number): GainPoint {
    return this.extreme(from, to, 1);
  }

  /** Smallest gain on [from, to], end points included. */
  lowest(from: number, to: number): GainPoint {
    return this.extreme(from, to, -1);
  }

  private extreme(from: number, to: number, sign: 1 | -1): GainPoint {
    if (!(from >= 0 && from <= to && to <= 0.5))
      throw new RangeError(`band ${from} to ${to} cycles/sample is not a rising pair in 0 to 0.5`);
    const { size, power } = this;
    const value = (f: number) => sign * gainAt(this.taps, f) ** 2;
    const first = Math.floor(from * size) + 1;
    const last = Math.ceil(to * size) - 1;
    let best = { at: from, value: value(from) };
    const offer = (point: Point) => {
      if (point.value > best.value) best = point;
    };
    offer({ at: to, value: value(to) });
    const at = (k: number) => (k < first ? from : k > last ? to : k / size);
    const fromValue = value(from);
    const toValue = value(to);
    const on = (k: number) => (k < first ? fromValue : k > last ? toValue : sign * power[k]!);

    // First the extreme that promises most, then only those that could still pass it.
    let promising = -1;
    let promise = Number.NEGATIVE_INFINITY;
    for (let k = first; k <= last; k++) {
      if (on(k) < on(k - 1) || on(k) < on(k + 1)) continue;
      const top = possible(at(k - 1), at(k), at(k + 1), on(k - 1), on(k), on(k + 1));
      if (top > promise) {
        promise = top;
        promising = k;
      }
    }
    // A maximum is flat, so its value needs no exact place; the gain at a zero is as wrong as its place.
    const precision = sign > 0 ? 1e-7 : 1e-13;
    const climbAt = (k: number) => offer(climb(value, at(k - 1), at(k), at(k + 1), precision));
    if (promising >= 0) climbAt(promising);
    for (let k = first; k <= last; k++) {
      if (k === promising || on(k) < on(k - 1) || on(k) < on(k + 1)) continue;
      const top = possible(at(k - 1), at(k), at(k + 1), on(k - 1), on(k), on(k + 1));
      if (Math.min(top, sign < 0 ? 0 : top) > best.value + this.doubt(best.value)) climbAt(k);
    }
    // An extreme in the cell next to an end need not show on the grid.
    if (to > from) {
      offer(climb(value, from, (from + at(first)) / 2, at(first), precision));
      offer(climb(value, at(last), (at(last) + to) / 2, to, precision));
    }
    return { gain: Math.sqrt(Math.abs(best.value)), frequency: best.at };
  }

  /** Difference of |H|^2 that rounding alone can make near a value of it. */
  private doubt(value: number): number {
    return 1e-13 * Math.abs(value) + 4 * this.rounding * Math.sqrt(Math.abs(value)) + this.rounding ** 2;
  }
}

/** Largest |H| on [from, to], end points included; 0 <= from <= to <= 0.5. */
export function peakGain(taps: Float64Array, from: number, to: number): GainPoint {
  return new GainCurve(taps).peak(from, to);
}

/** Smallest |H| on [from, to], end points included; 0 <= from <= to <= 0.5. */
export function lowestGain(taps: Float64Array, from: number, to: number): GainPoint {
  return new GainCurve(taps).lowest(from, to);
}

interface Point {
  readonly at: number;
  readonly value: number;
}

/** What a maximum bracketed by three points can reach, with the doubt of its parabola. */
function possible(a: number, b: number, c: number, va: number, vb: number, vc: number): number {
  const u = vertex(a, b, c, va, vb, vc);
  const top = u === null ? vb : parabola(a, b, c, va, vb, vc, u);
  return Math.max(vb, top) + PARABOLA_DOUBT * (Math.max(vb, top) - Math.min(va, vc));
}

/** Where the parabola through three points turns, or null when it is straight or opens upwards. */
function vertex(a: number, b: number, c: number, va: number, vb: number, vc: number): number | null {
  const left = (vb - va) / (b - a);
  const right = (vc - vb) / (c - b);
  const bend = (right - left) / (c - a);
  return bend < 0 ? (a + b) / 2 - left / (2 * bend) : null;
}

function parabola(a: number, b: number, c: number, va: number, vb: number, vc: number, x: number): number {
  const left = (vb - va) / (b - a);
  const right = (vc - vb) / (c - b);
  return va + left * (x - a) + ((right - left) / (c - a)) * (x - a) * (x - b);
}

const GOLDEN = (3 - Math.sqrt(5)) / 2;

/**
 * Highest point of a smooth function, from three points in rising order.
 * @param precision  of its place, as a share of the distance from first to last point
 */
export function climb(
  value: (f: number) => number,
  from: number,
  middle: number,
  to: number,
  precision: number,
): Point {
  let [a, b, c] = [from, middle, to];
  if (!(a < b && b < c)) return { at: a, value: value(a) };
  let [va, vb, vc] = [value(a), value(b), value(c)];
  const narrow = precision * (c - a);
  for (let i = 0; i < 100; i++) {
    const turn = vb >= va && vb >= vc ? vertex(a, b, c, va, vb, vc) : null;
    const inside = turn !== null && turn > a + narrow / 4 && turn < c - narrow / 4;
    const golden = b - a > c - b ? b - GOLDEN * (b - a) : b + GOLDEN * (c - b);
    // Every third step halves the longer side, so that the bracket cannot stay wide for ever.
    let u = inside && i % 3 < 2 ? turn : golden;
    // Not at once: three even points can turn at their middle by chance.
    const settled = i > 1 && inside && Math.abs(turn - b) < narrow;
    if (settled || c - a < 4 * narrow) break;
    if (u === b) u = golden;
    const vu = value(u);
    if (vu >= vb) {
      if (u < b) [c, vc] = [b, vb];
      else [a, va] = [b, vb];
      [b, vb] = [u, vu];
    } else if (u < b) [a, va] = [u, vu];
    else [c, vc] = [u, vu];
  }
  const ends: Point[] = [
    { at: b, value: vb },
    { at: a, value: va },
    { at: c, value: vc },
  ];
  return ends.reduce((best, p) => (p.value > best.value ? p : best));
}
