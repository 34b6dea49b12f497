/**
 * Equiripple filters: the smallest possible largest weighted error over bands, proved on the taps themselves.
 * References: T. W. Parks & J. H. McClellan (1972), IEEE Transactions on Circuit Theory CT-19, 189-194; see
 * equiripple-exchange.ts and alternation.ts. Recalled from memory.
 */
import { alternatingExtremes, strongest } from "./alternation.ts";
import { type DesignBand, largestDontCareGain, refuseImpossibleBands, wantedGain } from "./design-bands.ts";
import { DesignError } from "./design-error.ts";
import { type Exchange, exchange, pointsAround } from "./equiripple-exchange.ts";
import { amplitudeAt } from "./linear-phase.ts";

/** Above this the exchange takes seconds, and a windowed sinc or decimation serves better. */
export const MOST_EQUIRIPPLE_TAPS = 2001;

/** Relative distance of the deviation from its lower bound that counts as proof. */
const PROVED = 1e-6;
const MOST_REFINEMENTS = 12;

export interface EquirippleFilter {
  /** Exactly symmetric. */
  readonly taps: Float64Array;
  /** Largest weighted error over the bands, measured on the taps. */
  readonly deviation: number;
  /** No filter of this length has a smaller deviation (de la Vallee-Poussin). */
  readonly lowerBound: number;
  /** Extremes of alternating sign that reach the deviation within 1e-6; at least ceil(taps / 2) + 1. */
  readonly alternations: number;
  /** Largest gain where nothing was asked: a warning when it passes the passband's. */
  readonly largestDontCareGain: number;
}

/**
 * @param taps   1 to 2001; odd lengths make type I, even lengths type II, which is zero at the Nyquist frequency
 * @param bands  rising, with gaps between
 * @throws DesignError for impossible bands, and when the optimum cannot be proved on the taps within 1e-6
 */
export function designEquiripple(taps: number, bands: readonly DesignBand[]): EquirippleFilter {
  const made = measuredEquiripple(taps, bands);
  if (made === null) throw notProved(taps, "the exchange broke down");
  const { deviation, lowerBound } = made;
  const rounding = roundingOf(made.taps, bands);
  if (!(deviation - lowerBound <= PROVED * deviation + rounding && deviation > rounding))
    throw notProved(
      taps,
      `a deviation of ${deviation.toPrecision(4)} with a lower bound of ${lowerBound.toPrecision(4)}`,
    );
  return made;
}

/**
 * The same without proof, for searches that verify the response by other means; null when the exchange breaks down.
 * @throws DesignError for impossible bands
 */
export function measuredEquiripple(taps: number, bands: readonly DesignBand[]): EquirippleFilter | null {
  refuseImpossibleBands(taps, MOST_EQUIRIPPLE_TAPS, bands);
  const found = exchange(taps, bands);
  if (found === null) return null;
  const h = tapsThrough(taps, found);
  const error = (f: number, b: number) => bands[b]!.weight * (amplitudeAt(h, f) - wantedGain(bands[b]!, f));
  const extremes = alternatingExtremes(error, proofPoints(taps, found.reference, bands));
  const sizes = extremes.map((e) => Math.abs(e.error));
  const deviation = Math.max(0, ...sizes);
  const needed = Math.ceil(taps / 2) + 1;
  const proof = strongest(extremes, needed);
  const reached = (1 - PROVED) * deviation - roundingOf(h, bands);
  return {
    taps: h,
    deviation,
    lowerBound: proof.length < needed ? 0 : Math.min(...proof.map((e) => Math.abs(e.error))),
    alternations: sizes.filter((s) => s >= reached).length,
    largestDontCareGain: largestDontCareGain(h, bands).gain,
  };
}

/** Weighted error that rounding of the sums alone can make. */
function roundingOf(taps: Float64Array, bands: readonly DesignBand[]): number {
  const heaviest = Math.max(...bands.map((b) => b.weight));
  return 32 * Number.EPSILON * heaviest * taps.reduce((sum, x) => sum + Math.abs(x), 1);
}

function notProved(taps: number, reached: string): DesignError {
  return new DesignError({
    problem:
      "the equiripple design cannot be proved to be the best: its error is too small for double precision, or its gain between the bands too large",
    given: `${taps} taps; ${reached}`,
    allowed: "a deviation within 1e-6 of its lower bound",
    todo: "use fewer taps, make wide gaps between bands narrower, or take another method",
  });
}

/**
 * Taps whose amplitude is the exchange's. Between bands the polynomial is known far less well than inside them, and
 * the inverse transform spreads what is lost there over all frequencies; so what is missing at the reference is
 * measured on the taps and put back, as in the iterative refinement of a linear system.
 */
function tapsThrough(n: number, { amplitude, correction, reference }: Exchange): Float64Array {
  let h = tapsOf(n, amplitude);
  let least = Number.POSITIVE_INFINITY;
  for (let i = 0; i < MOST_REFINEMENTS; i++) {
    const missing = reference.map((f) => amplitude(f) - amplitudeAt(h, f));
    const most = missing.reduce((m, x) => Math.max(m, Math.abs(x)), 0);
    if (!(most < least / 2)) break;
    least = most;
    const more = tapsOf(n, correction(missing));
    h = h.map((x, k) => x + more[k]!);
  }
  return h;
}

/** Taps with a given amplitude, from its values at k / N (inverse discrete Fourier transform). */
function tapsOf(n: number, amplitude: (f: number) => number): Float64Array {
  const count = Math.ceil(n / 2);
  const samples = Float64Array.from({ length: count }, (_, k) => amplitude(k / n));
  const turn = Float64Array.from({ length: 2 * n }, (_, i) => Math.cos((Math.PI * i) / n));
  const h = new Float64Array(n);
  for (let i = 0; i < count; i++) {
    let sum = samples[0]! / 2;
    const step = n - 1 - 2 * i;
    for (let k = 1; k < count; k++) sum += samples[k]! * turn[(k * step) % (2 * n)]!;
    h[i] = (2 * sum) / n;
    h[n - 1 - i] = h[i]!;
  }
  return h;
}

/** Where the taps are looked at for proof: around the reference, and everywhere at 16 points a tap. */
function proofPoints(taps: number, reference: Float64Array, bands: readonly DesignBand[]): Float64Array[] {
  return pointsAround(reference, bands).map((points, b) => {
    const { from, to } = bands[b]!;
    const density = 32 * taps;
    const plain: number[] = [];
    for (let k = Math.ceil(from * density); k <= to * density; k++) plain.push(k / density);
    return Float64Array.from(new Set([...points, ...plain]))
      .filter((f) => f >= from && f <= to)
      .sort();
  });
}
