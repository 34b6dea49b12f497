/**
 * What a filter of given taps does to frequencies, steps and time. Frequencies in cycles/sample, 0 to 0.5.
 * References: Oppenheim & Schafer, Discrete-Time Signal Processing, sections 5.1 and 5.7 (frequency response,
 * group delay, linear phase); recalled from memory.
 */

import { gainAtBins } from "./gain-at-bins.ts";

/** H(f) = sum of taps[n] e^(-2 pi i f n). The rotation is renewed every 64 taps, so its error stays below 1e-14. */
export function responseAt(taps: Float64Array, f: number): { re: number; im: number } {
  let re = 0;
  let im = 0;
  const stepRe = Math.cos(2 * Math.PI * f);
  const stepIm = -Math.sin(2 * Math.PI * f);
  let a = 1;
  let b = 0;
  for (let n = 0; n < taps.length; n++) {
    if ((n & 63) === 0) {
      const turn = 2 * Math.PI * ((f * n) % 1);
      a = Math.cos(turn);
      b = -Math.sin(turn);
    }
    re += taps[n]! * a;
    im += taps[n]! * b;
    const next = a * stepRe - b * stepIm;
    b = a * stepIm + b * stepRe;
    a = next;
  }
  return { re, im };
}

/** |H(f)|. */
export function gainAt(taps: Float64Array, f: number): number {
  const { re, im } = responseAt(taps, f);
  return Math.hypot(re, im);
}

/** Points a tap at which an interval is looked at; |H|^2 has at most N - 1 extremes over 0 to 0.5. */
const POINTS_PER_TAP = 16;

/** Largest |H| on [from, to], end points included. */
export function peakGain(taps: Float64Array, from: number, to: number): { gain: number; frequency: number } {
  return extremeGain(taps, from, to, 1);
}

/** Smallest |H| on [from, to], end points included. */
export function lowestGain(
  taps: Float64Array,
  from: number,
  to: number,
): { gain: number; frequency: number } {
  return extremeGain(taps, from, to, -1);
}

function extremeGain(
  taps: Float64Array,
  from: number,
  to: number,
  sign: 1 | -1,
): { gain: number; frequency: number } {
  const { gains, size } = denseGains(taps);
  const value = (f: number) => sign * gainAt(taps, f);
  const first = Math.ceil(from * size);
  const last = Math.min(gains.length - 1, Math.floor(to * size));
  let best = Math.max(value(from), value(to));
  let at = value(from) >= value(to) ? from : to;
  for (let k = first; k <= last; k++)
    if (sign * gains[k]! > best) {
      best = sign * gains[k]!;
      at = k / size;
    }
  // Between grid points a peak can be higher by a per cent: every peak that could win is looked at closely.
  const near = best - 0.01 * Math.abs(best);
  const rough = best;
  let looked = 0;
  for (let k = first; k <= last && looked < 64; k++) {
    const g = sign * gains[k]!;
    const peak =
      g >= near && !(k > first && sign * gains[k - 1]! > g) && !(k < last && sign * gains[k + 1]! > g);
    if (!peak) continue;
    looked++;
    const top = climb(value, Math.max(from, (k - 1) / size), Math.min(to, (k + 1) / size));
    if (top.value > best) {
      best = top.value;
      at = top.at;
    }
  }
  const ends = [
    climb(value, from, Math.min(to, first / size)),
    climb(value, Math.max(from, last / size), to),
  ];
  for (const top of ends)
    if (top.value > best && top.value >= rough) {
      best = top.value;
      at = top.at;
    }
  return { gain: sign * best, frequency: at };
}

/** Highest point of a function on [a, b] by golden-section search. */
function climb(value: (f: number) => number, from: number, to: number): { value: number; at: number } {
  const ratio = (Math.sqrt(5) - 1) / 2;
  let a = from;
  let b = to;
  let c = b - ratio * (b - a);
  let d = a + ratio * (b - a);
  let vc = value(c);
  let vd = value(d);
  for (let i = 0; i < 40 && b - a > 1e-15; i++) {
    if (vc > vd) {
      b = d;
      d = c;
      vd = vc;
      c = b - ratio * (b - a);
      vc = value(c);
    } else {
      a = c;
      c = d;
      vc = vd;
      d = a + ratio * (b - a);
      vd = value(d);
    }
  }
  return vc > vd ? { value: vc, at: c } : { value: vd, at: d };
}

/** |H| at k / size for k = 0 … size / 2, size a power of two with at least 16 points a tap. */
function denseGains(taps: Float64Array): { gains: Float64Array; size: number } {
  const size = 2 ** Math.ceil(Math.log2(Math.max(256, 2 * POINTS_PER_TAP * taps.length)));
  return { gains: gainAtBins(taps, size), size };
}

/** Symmetry of the taps to within rounding of the largest. */
export function symmetryOf(taps: Float64Array): "even" | "odd" | "none" {
  const n = taps.length;
  const near = 4 * Number.EPSILON * taps.reduce((m, w) => Math.max(m, Math.abs(w)), 0);
  const all = (sign: 1 | -1) => taps.every((w, i) => Math.abs(w - sign * taps[n - 1 - i]!) <= near);
  if (all(1)) return "even";
  return all(-1) ? "odd" : "none";
}

export interface GroupDelay {
  /** Delay at low frequency, or for a filter that does not pass it, at its strongest frequency. */
  readonly samples: number;
  readonly constant: boolean;
  /** Over the passband: where the gain is at least half its peak. */
  readonly lowest: number;
  readonly highest: number;
}

/** Group delay in samples: (N - 1) / 2 for symmetric taps, else Re(sum n h[n] e / H) over the passband. */
export function groupDelayOf(taps: Float64Array): GroupDelay {
  if (symmetryOf(taps) !== "none") {
    const half = (taps.length - 1) / 2;
    return { samples: half, constant: true, lowest: half, highest: half };
  }
  const ramp = taps.map((w, n) => w * n);
  const points = 512;
  const gains = Array.from({ length: points + 1 }, (_, i) => gainAt(taps, i / (2 * points)));
  const peak = Math.max(...gains);
  let lowest = Number.POSITIVE_INFINITY;
  let highest = Number.NEGATIVE_INFINITY;
  const delayAt = (f: number) => {
    const h = responseAt(taps, f);
    const r = responseAt(ramp, f);
    return (r.re * h.re + r.im * h.im) / (h.re * h.re + h.im * h.im);
  };
  for (let i = 0; i <= points; i++) {
    if (gains[i]! < peak / 2) continue;
    const delay = delayAt(i / (2 * points));
    lowest = Math.min(lowest, delay);
    highest = Math.max(highest, delay);
  }
  const strongest = gains[0]! >= peak / 2 ? 0 : gains.indexOf(peak) / (2 * points);
  return { samples: delayAt(strongest), constant: highest - lowest < 1e-9, lowest, highest };
}

/**
 * Frequencies where the gain crosses 1, 3 and 6 dB below its peak, at the limits of the passband: the widest
 * stretch around the peak for low-, high- and band-pass; the gap's two sides for a band-stop.
 */
export function edgeFrequencies(taps: Float64Array): { f1: number[]; f3: number[]; f6: number[] } {
  const { gains, size } = denseGains(taps);
  const points = size / 2;
  const peak = gains.reduce((m, g) => Math.max(m, g), 0);
  const at = (dB: number) => crossings(taps, gains, points, peak * 10 ** (-dB / 20));
  return { f1: at(1), f3: at(3), f6: at(6) };
}

function crossings(taps: Float64Array, gains: Float64Array, points: number, level: number): number[] {
  const found: number[] = [];
  const refine = (i: number): number => {
    let low = i / (2 * points);
    let high = (i + 1) / (2 * points);
    const above = gains[i]! >= level;
    for (let k = 0; k < 60; k++) {
      const middle = (low + high) / 2;
      if (gainAt(taps, middle) >= level === above) low = middle;
      else high = middle;
    }
    return (low + high) / 2;
  };
  const passesLow = gains[0]! >= level;
  const passesHigh = gains[points]! >= level;
  const first = gains.findIndex((g, i) => i > 0 && g >= level !== gains[i - 1]! >= level);
  if (first < 0) return found;
  let last = points;
  while (last > 0 && gains[last]! >= level === gains[last - 1]! >= level) last--;
  if (passesLow && passesHigh) found.push(refine(first - 1), refine(last - 1));
  else if (passesLow) found.push(refine(first - 1));
  else if (passesHigh) found.push(refine(last - 1));
  else {
    // Band-pass: walk out from the peak, so that a high side lobe is not taken for an edge.
    const top = gains.reduce((m, g, i) => (g > gains[m]! ? i : m), 0);
    let a = top;
    let b = top;
    while (a > 0 && gains[a - 1]! >= level) a--;
    while (b < points && gains[b + 1]! >= level) b++;
    found.push(refine(a - 1), refine(b));
  }
  return found;
}

/** One-sided equivalent noise bandwidth, cycles/sample: sum h^2 / (2 peak^2), by Parseval's theorem. */
export function noiseBandwidth(taps: Float64Array): number {
  const peak = peakGain(taps, 0, 0.5).gain;
  return taps.reduce((sum, w) => sum + w * w, 0) / (2 * peak * peak);
}

export interface StepResponse {
  /** Samples from 10 % to 90 % of the final value, on the straight line between samples; null when it is 0. */
  readonly rise_10_90: number | null;
  /** Largest value above the final one, as a share of it. */
  readonly overshoot: number;
}

/** Running sum of the taps: the answer to a unit step. */
export function stepResponse(taps: Float64Array): StepResponse {
  const final = taps.reduce((sum, w) => sum + w, 0);
  const size = taps.reduce((sum, w) => sum + Math.abs(w), 0);
  if (Math.abs(final) < 1e-6 * size) return { rise_10_90: null, overshoot: 0 };
  let sum = 0;
  let highest = 0;
  let low: number | null = null;
  let high: number | null = null;
  for (let n = 0; n < taps.length; n++) {
    const before = sum / final;
    sum += taps[n]!;
    const now = sum / final;
    // The last crossing of 10 % before the first of 90 %: what comes earlier is ringing.
    if (high === null && before < 0.1 && now >= 0.1) low = n - 1 + (0.1 - before) / (now - before);
    if (high === null && before < 0.9 && now >= 0.9) high = n - 1 + (0.9 - before) / (now - before);
    highest = Math.max(highest, now);
  }
  return {
    rise_10_90: low === null || high === null ? null : high - low,
    overshoot: Math.max(0, highest - 1),
  };
}
