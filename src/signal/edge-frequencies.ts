/**
 * The frequencies by which a passband is known: where the gain crosses 1, 3 and 6 dB below its largest.
 * Levels are exact decibels, 10^(-1/20), 10^(-3/20), 10^(-6/20); half power is 3.0103 dB and not the same.
 */
import { gainAt } from "./frequency-response.ts";
import { GainCurve } from "./gain-curve.ts";

/** Cycles/sample, rising: one for low- and high-pass, two for band-pass and band-stop; none where nothing crosses. */
export interface EdgeFrequencies {
  readonly f1: number[];
  readonly f3: number[];
  readonly f6: number[];
}

/** Bisections from a grid cell: below 1e-15 cycles/sample. */
const BISECTIONS = 50;

/**
 * The crossings outermost in each passband. A passband is a stretch within 6 dB of the largest gain, so ripple
 * inside it is no edge. The curve has 16 points a tap, so the grid cannot miss the band of the peak: by
 * Bernstein's inequality some point of it is within 0.03 dB of the largest gain.
 */
export function edgeFrequencies(taps: Float64Array): EdgeFrequencies {
  const curve = new GainCurve(taps);
  const { gain: peak } = curve.peak(0, 0.5);
  if (peak === 0) return { f1: [], f3: [], f6: [] };
  const bands = passbands(curve, level(peak, 6));
  const at = (dB: number) => bands.flatMap(([a, b]) => crossings(curve, a, b, level(peak, dB)));
  return { f1: at(1), f3: at(3), f6: at(6) };
}

const level = (peak: number, dB: number): number => peak * 10 ** (-dB / 20);

/** First and last grid index of each stretch at or above a gain. */
function passbands(curve: GainCurve, least: number): [number, number][] {
  const found: [number, number][] = [];
  const { power } = curve;
  let from = -1;
  for (let k = 0; k <= power.length; k++) {
    const passes = k < power.length && power[k]! >= least * least;
    if (passes && from < 0) from = k;
    else if (!passes && from >= 0) {
      found.push([from, k - 1]);
      from = -1;
    }
  }
  return found;
}

/** The outermost crossings of a gain inside one passband, first to last grid index; none if it stays below. */
function crossings(curve: GainCurve, first: number, last: number, least: number): number[] {
  const { power, size, taps } = curve;
  let a = first;
  while (a <= last && power[a]! < least * least) a++;
  let b = last;
  while (b > a && power[b]! < least * least) b--;
  if (a > last) return [];
  const found: number[] = [];
  if (a > 0) found.push(bisect(taps, (a - 1) / size, a / size, least));
  if (b < power.length - 1) found.push(bisect(taps, (b + 1) / size, b / size, least));
  return found;
}

/** Crossing of a gain between a frequency below it and one above it. */
function bisect(taps: Float64Array, below: number, above: number, least: number): number {
  let [low, high] = [below, above];
  for (let i = 0; i < BISECTIONS; i++) {
    const middle = (low + high) / 2;
    if (gainAt(taps, middle) >= least) high = middle;
    else low = middle;
  }
  return (low + high) / 2;
}
