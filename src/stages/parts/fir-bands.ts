/** Filters of given length by other methods than the windowed sinc. */
import type { DesignBand } from "../../signal/design-bands.ts";
import { designEquiripple } from "../../signal/equiripple.ts";
import { designLeastSquares } from "../../signal/least-squares.ts";
import { groupDelayOf } from "../../signal/response.ts";
import { savitzkyGolayTaps } from "../../signal/savitzky-golay.ts";
import type { FirSettings } from "../fir.ts";
import type { Problem } from "../stage.ts";
import { hertz, missing } from "./fir-edges.ts";
import type { ChosenTaps } from "./fir-taps.ts";
import { inCyclesPerSample } from "./frequencies.ts";

/** A method that does not go with the way in which the filter is described. */
export function wrongMethod(s: FirSettings, allowed: string, todo: string): Problem {
  return {
    code: "fir-method",
    severity: "error",
    path: ["method"],
    problem: `method ${s.method} does not go with these settings`,
    given: s.method,
    allowed,
    todo,
  };
}

/** Local polynomials of given degree. */
export function savitzkyGolay(s: FirSettings, problems: Problem[]): ChosenTaps | null {
  const before = problems.length;
  if (s.taps === undefined) problems.push(missing("taps", "an odd count"));
  if (s.degree === undefined) problems.push(missing("degree", "a count below taps"));
  const extra = (["shape", "edge", "window", "beta", "bands"] as const).filter((key) => s[key] !== undefined);
  if (extra.length > 0)
    problems.push({
      code: "fir-method",
      severity: "error",
      path: [extra[0]!],
      problem: "a savitzky-golay filter is described by taps and degree alone",
      given: extra.join(", "),
      allowed: "taps, degree, reach, ends",
      todo: "take it out",
    });
  const { taps: n, degree } = s;
  if (n === undefined || degree === undefined || problems.length > before) return null;
  if (n % 2 === 0 || degree >= n) {
    problems.push({
      code: "savitzky-golay-size",
      severity: "error",
      path: [n % 2 === 0 ? "taps" : "degree"],
      problem:
        n % 2 === 0
          ? "a savitzky-golay window has an odd length"
          : "the degree must be below the number of taps",
      given: `taps ${n}, degree ${degree}`,
      allowed: "an odd number of taps above the degree",
      todo: n % 2 === 0 ? `use ${n + 1} taps` : "use a lower degree or more taps",
    });
    return null;
  }
  const past = s.reach === "past-only";
  const taps = savitzkyGolayTaps(n, degree, past ? "trailing-end" : "centre");
  return {
    taps,
    says: `Fitted a polynomial of degree ${degree} to each stretch and took its value at the ${past ? "newest sample" : "middle"} (Savitzky–Golay):`,
    settings: { method: "savitzky-golay", taps: n, degree },
    notes: {},
    delay: past ? groupDelayOf(taps).samples : (n - 1) / 2,
  };
}

/** Equiripple or least squares over bands. */
export function byBands(
  s: FirSettings,
  bands: NonNullable<FirSettings["bands"]>,
  interval_s: number,
  problems: Problem[],
): ChosenTaps | null {
  const before = problems.length;
  if (s.method !== "equiripple" && s.method !== "least-squares")
    problems.push(wrongMethod(s, "equiripple, least-squares", "set method: equiripple"));
  if (s.taps === undefined) problems.push(missing("taps", "a count"));
  const extra = (["shape", "edge", "window", "beta", "degree"] as const).filter(
    (key) => s[key] !== undefined,
  );
  if (extra.length > 0)
    problems.push({
      code: "fir-way",
      severity: "error",
      path: [extra[0]!],
      problem: "bands say it all: they do not go with another description",
      given: extra.join(", "),
      allowed: "taps, method and bands",
      todo: "take it out",
    });
  const wanted: DesignBand[] = bands.map((band, i) => {
    const from = inCyclesPerSample(band.from, interval_s);
    const to = inCyclesPerSample(band.to, interval_s);
    const previous = i === 0 ? Number.NEGATIVE_INFINITY : inCyclesPerSample(bands[i - 1]!.to, interval_s);
    if (!(from < to && to <= 0.5 + 1e-12 && from > previous))
      problems.push({
        code: "band-limits",
        severity: "error",
        path: ["bands", i],
        problem: "the bands must rise, without touching, up to the Nyquist frequency",
        given: `${hertz(from / interval_s)} to ${hertz(to / interval_s)}`,
        allowed: `from below to, above the band before, up to ${hertz(0.5 / interval_s)}`,
        todo: "sort the bands and leave a free stretch between them",
      });
    const gain = band.gain.length === 1 ? band.gain[0]! : ([band.gain[0]!, band.gain[1]!] as const);
    return { from, to: Math.min(to, 0.5), gain, weight: band.weight };
  });
  if (s.taps === undefined || problems.length > before) return null;
  const settings = {
    method: s.method,
    taps: s.taps,
    bands: bands.map((b, i) => ({
      from_Hz: wanted[i]!.from / interval_s,
      to_Hz: wanted[i]!.to / interval_s,
      gain: b.gain,
      weight: b.weight,
    })),
  };
  if (s.method === "least-squares") {
    const made = designLeastSquares(s.taps, wanted);
    return {
      taps: made.taps,
      says: "Filtered by a least-squares design to the bands given:",
      settings,
      notes: {},
      delay: (s.taps - 1) / 2,
    };
  }
  const made = designEquiripple(s.taps, wanted);
  const passband = Math.max(...bands.flatMap((b) => b.gain.map(Math.abs)));
  if (made.largestDontCareGain > 1.12 * passband)
    problems.push({
      code: "free-band-peak",
      severity: "warning",
      path: ["bands"],
      problem: `where nothing was asked the gain rises to ${Number(made.largestDontCareGain.toPrecision(3))}`,
      given: `${s.taps} taps and these bands`,
      allowed: "any; what lies there is amplified",
      todo: "ask for something there, or make the free stretches equally wide",
    });
  return {
    taps: made.taps,
    says: "Filtered by an equiripple design to the bands given:",
    settings,
    notes: {
      weighted_deviation: made.deviation,
      no_filter_below: made.lowerBound,
      alternations: made.alternations,
      largest_gain_between_bands: made.largestDontCareGain,
    },
    delay: (s.taps - 1) / 2,
  };
}
