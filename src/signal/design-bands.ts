/** Bands of a filter by criterion: what is wanted of the gain, and how much it matters. Cycles/sample, 0 to 0.5. */
import { DesignError } from "./design-error.ts";
import { GainCurve, type GainPoint } from "./gain-curve.ts";

export interface DesignBand {
  readonly from: number;
  readonly to: number;
  /** Wanted gain, or its values at both ends with a straight line between. */
  readonly gain: number | readonly [atFrom: number, atTo: number];
  /** Weight of the error, > 0. */
  readonly weight: number;
}

/** Gain wanted at a frequency inside the band. */
export function wantedGain(band: DesignBand, f: number): number {
  if (typeof band.gain === "number") return band.gain;
  const [a, b] = band.gain;
  return a + ((b - a) * (f - band.from)) / (band.to - band.from);
}

/** Frequencies that belong to no band, rising. */
export function dontCareBands(bands: readonly DesignBand[]): [from: number, to: number][] {
  const edges = [0, ...bands.flatMap((b) => [b.from, b.to]), 0.5];
  const gaps: [number, number][] = [];
  for (let i = 0; i < edges.length; i += 2)
    if (edges[i + 1]! > edges[i]!) gaps.push([edges[i]!, edges[i + 1]!]);
  return gaps;
}

/** Largest gain where nothing was asked, gain 0 at frequency 0 when every frequency belongs to a band. */
export function largestDontCareGain(taps: Float64Array, bands: readonly DesignBand[]): GainPoint {
  const curve = new GainCurve(taps);
  return dontCareBands(bands)
    .map(([from, to]) => curve.peak(from, to))
    .reduce((a, b) => (b.gain > a.gain ? b : a), { gain: 0, frequency: 0 });
}

/** @throws DesignError for bands that overlap, touch, are out of range or want nothing, and lengths that cannot serve */
export function refuseImpossibleBands(taps: number, most: number, bands: readonly DesignBand[]): void {
  const refuse = (problem: string, given: string, allowed: string, todo: string): never => {
    throw new DesignError({ problem, given, allowed, todo });
  };
  if (!(Number.isInteger(taps) && taps >= 1 && taps <= most))
    refuse(
      "the length is out of the range of this method",
      `${taps} taps`,
      `1 to ${most} taps`,
      "change the length",
    );
  if (bands.length === 0)
    refuse("there is no band to design for", "no bands", "one band or more", "add bands");
  for (const [i, band] of bands.entries()) {
    const said = `band ${i + 1}: ${band.from} to ${band.to} cycles/sample`;
    if (!(band.from >= 0 && band.from < band.to && band.to <= 0.5))
      refuse("a band is not a rising pair inside 0 to 0.5", said, "0 <= from < to <= 0.5", "move its edges");
    if (i > 0 && !(band.from > bands[i - 1]!.to))
      refuse(
        "bands must rise and leave a gap between them, in which the gain can change",
        said,
        `from above ${bands[i - 1]!.to}`,
        "move its edges apart",
      );
    const gains = typeof band.gain === "number" ? [band.gain] : band.gain;
    if (!gains.every(Number.isFinite) || !(band.weight > 0 && band.weight < Number.POSITIVE_INFINITY))
      refuse(
        "a band needs a finite gain and a weight above 0",
        `${said}, gain ${gains.join(" to ")}, weight ${band.weight}`,
        "a finite gain, a weight above 0",
        "change them",
      );
  }
  if (bands.every((b) => b.gain === 0 || (typeof b.gain !== "number" && b.gain[0] === 0 && b.gain[1] === 0)))
    refuse("nothing is to pass", "gain 0 in every band", "a gain other than 0 in some band", "change a gain");
  const last = bands.at(-1)!;
  if (taps % 2 === 0 && last.to === 0.5 && wantedGain(last, 0.5) !== 0)
    refuse(
      "a symmetric filter of even length is zero at the Nyquist frequency, where this one should pass",
      `${taps} taps, gain ${wantedGain(last, 0.5)} at 0.5 cycles/sample`,
      "an odd number of taps",
      `use ${taps + 1} taps`,
    );
}
