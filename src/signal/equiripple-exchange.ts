/**
 * The exchange of Remez for linear-phase filters: error weighted, equal and alternating at r + 1 frequencies, which
 * are moved to the extremes of the error until these are all of one size.
 * References: T. W. Parks & J. H. McClellan (1972), IEEE Transactions on Circuit Theory CT-19, 189-194; J. H.
 * McClellan, T. W. Parks & L. R. Rabiner (1973), IEEE Transactions on Audio and Electroacoustics AU-21, 506-526;
 * S.-I. Filip (2016), ACM Transactions on Mathematical Software 43, article 7 (start from a shorter filter).
 * Recalled from memory.
 */
import { alternatingExtremes, crowdedPoints, strongest } from "./alternation.ts";
import { CosineInterpolant } from "./cosine-interpolant.ts";
import { type DesignBand, wantedGain } from "./design-bands.ts";

export interface Exchange {
  /** Frequencies of the alternation, rising, r + 1 of them. */
  readonly reference: Float64Array;
  /** Signed amplitude at a frequency, cycles/sample. */
  readonly amplitude: (f: number) => number;
  /** The amplitude with given values at the reference: one value too many, of which the excess is shared out. */
  readonly correction: (values: Float64Array) => (f: number) => number;
  /** Largest weighted error found, and the common size at the reference: equal when converged. */
  readonly largest: number;
  readonly common: number;
}

const MOST_ROUNDS = 60;
/** Relative difference of largest and common error at which the exchange has done its work. */
const CONVERGED = 1e-11;
/** Rounds without progress after which rounding is all that is left. */
const PATIENCE = 6;
/** The common error grows from round to round; by less than this, relative, it is rounding. */
const PROGRESS = 1e-12;
/** Coefficients below which an even spread is a good enough start. */
const SHORT = 20;

/** Points between neighbours of the reference; the error has about one extreme there. */
const POINTS_BETWEEN = 8;

/** Null when the exchange breaks down: the error has fewer alternations than it must, or is no number. */
export function exchange(taps: number, bands: readonly DesignBand[]): Exchange | null {
  const r = Math.ceil(taps / 2);
  if (r <= SHORT) return settle(taps, bands, evenSpread(r + 1, bands));
  // A filter of half the length has its extremes where this one has every second.
  const half = exchange(2 * Math.ceil(r / 2) - (taps % 2), bands);
  const start = half === null ? evenSpread(r + 1, bands) : stretched(half.reference, r + 1, bands);
  return settle(taps, bands, start) ?? settle(taps, bands, evenSpread(r + 1, bands));
}

function settle(taps: number, bands: readonly DesignBand[], start: Float64Array): Exchange | null {
  let reference = start;
  let best: Exchange | null = null;
  let highest = 0;
  let idle = 0;
  for (let round = 0; round < MOST_ROUNDS && idle < PATIENCE; round++) {
    const { amplitude, correction, common } = equalError(taps, bands, reference);
    const error = (f: number, b: number) => bands[b]!.weight * (amplitude(f) - wantedGain(bands[b]!, f));
    const extremes = alternatingExtremes(error, pointsAround(reference, bands));
    const largest = extremes.reduce((m, e) => Math.max(m, Math.abs(e.error)), 0);
    if (!Number.isFinite(largest) || !Number.isFinite(common) || extremes.length < reference.length) break;
    const spread = (x: Exchange) => (x.largest - x.common) / x.largest;
    const now = { reference, amplitude, correction, largest, common };
    idle = best === null || spread(now) < spread(best) || common > highest * (1 + PROGRESS) ? 0 : idle + 1;
    if (best === null || spread(now) < spread(best)) best = now;
    highest = Math.max(highest, common);
    if (spread(now) < CONVERGED) break;
    reference = Float64Array.from(strongest(extremes, reference.length), (e) => e.frequency);
  }
  return best;
}

/** The amplitude whose weighted error alternates, equal in size, at the reference. */
function equalError(
  taps: number,
  bands: readonly DesignBand[],
  reference: Float64Array,
): Pick<Exchange, "amplitude" | "correction" | "common"> {
  // Even lengths have a factor cos(pi f): the polynomial approximates what is wanted divided by it.
  const factor = taps % 2 === 0 ? (f: number) => Math.sin(Math.PI * (0.5 - f)) : () => 1;
  const inBand = (f: number) => bands.find((b) => f >= b.from && f <= b.to)!;
  const factors = reference.map(factor);
  const allowance = reference.map((f, k) => (k % 2 === 0 ? 1 : -1) / (inBand(f).weight * factors[k]!));
  const polynomial = new CosineInterpolant(reference);
  const { weights } = polynomial;
  /** Values at all r + 1 points that a polynomial of r coefficients can have, the excess alternating. */
  const levelled = (values: Float64Array) => {
    let above = 0;
    let below = 0;
    for (let k = 0; k < values.length; k++) {
      above += weights[k]! * values[k]!;
      below += weights[k]! * allowance[k]!;
    }
    const level = above / below;
    return { level, values: values.map((v, k) => v - level * allowance[k]!) };
  };
  const through = (values: Float64Array) => (f: number) => factor(f) * polynomial.at(f, values);
  const wanted = levelled(reference.map((f, k) => wantedGain(inBand(f), f) / factors[k]!));
  return {
    amplitude: through(wanted.values),
    correction: (values) => through(levelled(values.map((v, k) => v / factors[k]!)).values),
    common: Math.abs(wanted.level),
  };
}

/** Points of every band at which the error is looked at: the reference, and some between its members. */
export function pointsAround(reference: Float64Array, bands: readonly DesignBand[]): Float64Array[] {
  return bands.map(({ from, to }) => {
    const inside = Array.from(reference).filter((f) => f > from && f < to);
    const knots = [from, ...inside, to];
    const points = [from];
    for (let i = 1; i < knots.length; i++)
      points.push(...crowdedPoints(knots[i - 1]!, knots[i]!, POINTS_BETWEEN).slice(1));
    return Float64Array.from(points);
  });
}

/** A reference shared out over the bands by their widths, at least one point each as far as they last. */
function evenSpread(count: number, bands: readonly DesignBand[]): Float64Array {
  return spread(
    count,
    bands,
    bands.map((b) => b.to - b.from),
    (b, t) => b.from + (b.to - b.from) * t,
  );
}

/** The reference of a shorter filter, drawn out to more points. */
function stretched(shorter: Float64Array, count: number, bands: readonly DesignBand[]): Float64Array {
  const angles = bands.map((b) =>
    Array.from(shorter)
      .filter((f) => f >= b.from && f <= b.to)
      .map((f) => 2 * Math.asin(Math.sqrt(Math.min(1, Math.max(0, (f - b.from) / (b.to - b.from)))))),
  );
  return spread(
    count,
    bands,
    angles.map((a) => a.length),
    (band, t, b) => {
      const known = angles[b]!;
      if (known.length < 2) return band.from + (band.to - band.from) * t;
      const place = t * (known.length - 1);
      const i = Math.min(known.length - 2, Math.floor(place));
      const angle = known[i]! + (place - i) * (known[i + 1]! - known[i]!);
      return band.from + (band.to - band.from) * Math.sin(angle / 2) ** 2;
    },
  );
}

/** Shares a count out in proportion (largest remainders) and places each band's points by t = 0 … 1. */
function spread(
  count: number,
  bands: readonly DesignBand[],
  sizes: readonly number[],
  place: (band: DesignBand, t: number, b: number) => number,
): Float64Array {
  const whole = sizes.reduce((a, b) => a + b, 0);
  const exact = sizes.map((s) => (s / whole) * count);
  const shares = exact.map(Math.floor);
  const order = exact.map((x, i) => [x - shares[i]!, i] as const).sort((a, b) => b[0] - a[0] || a[1] - b[1]);
  const missing = count - shares.reduce((a, b) => a + b, 0);
  for (let i = 0; i < missing; i++) shares[order[i]![1]]!++;
  const points: number[] = [];
  for (const [b, band] of bands.entries()) {
    const n = shares[b]!;
    // The Nyquist frequency is no place for an even length, whose amplitude is zero there whatever one does.
    const end = band.to === 0.5 ? 1 - 1 / (4 * count) : 1;
    for (let i = 0; i < n; i++)
      points.push(Math.min(band.to, place(band, n === 1 ? 0.5 : (i / (n - 1)) * end, b)));
  }
  return Float64Array.from(points);
}
