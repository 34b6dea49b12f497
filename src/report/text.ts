/** Numbers, times and frequencies as a reader of the report wants them. */

const MINUS = "\u2212";
const NARROW = "\u202f";

/** At most `digits` significant digits, thousands in groups, a true minus; a dash where there is no number. */
export function number(x: number | null | undefined, digits = 4): string {
  if (x === null || x === undefined || Number.isNaN(x)) return "–";
  if (!Number.isFinite(x)) return x > 0 ? "∞" : `${MINUS}∞`;
  const rounded = Number(x.toPrecision(digits));
  const size = Math.abs(rounded);
  if (size === 0) return "0";
  const sign = rounded < 0 ? MINUS : "";
  if (size >= 1e6 || size < 1e-4) {
    const [mantissa, exponent] = size.toExponential().split("e") as [string, string];
    return `${sign}${mantissa}${NARROW}×${NARROW}10${superscript(exponent.replace("+", ""))}`;
  }
  const [whole, fraction] = String(size).split(".") as [string, string | undefined];
  const groups = whole.length > 4 ? whole.replace(/\B(?=(\d{3})+$)/g, NARROW) : whole;
  return `${sign}${groups}${fraction === undefined ? "" : `.${fraction}`}`;
}

const RAISED = "⁰¹²³⁴⁵⁶⁷⁸⁹";
const superscript = (text: string): string =>
  [...text].map((c) => (c === "-" ? "⁻" : RAISED[Number(c)]!)).join("");

/** A whole number, all digits, in groups. */
export function count(n: number): string {
  return String(n).replace(/\B(?=(\d{3})+$)/g, NARROW);
}

export const withUnit = (x: number | null | undefined, unit: string, digits = 4): string =>
  x === null || x === undefined ? "–" : `${number(x, digits)}${NARROW}${unit}`;

const TIMES = [
  ["d", 86_400, 2],
  ["h", 3600, 2],
  ["min", 60, 2],
  ["s", 1, 1],
  ["ms", 1e-3, 1],
  ["µs", 1e-6, 0],
] as const;

/** A length of time with the unit that reads best. */
export function duration(s: number | null, digits = 4): string {
  if (s === null) return "the whole record";
  // Below a picosecond stands only rounding.
  if (Math.abs(s) < 1e-12) return `0${NARROW}s`;
  for (const [unit, factor, enough] of TIMES) {
    const n = Math.abs(s) / factor;
    if ((n >= 1 && Math.abs(n - Math.round(n)) < 1e-9) || n >= enough)
      return withUnit(s / factor, unit, digits);
  }
  return withUnit(s, "s", digits);
}

/** A frequency with the unit that reads best. */
export function hertz(f: number | null | undefined, digits = 4): string {
  if (f === null || f === undefined) return "–";
  if (f === 0) return `0${NARROW}Hz`;
  const [unit, factor] =
    f < 1e-3 ? ["µHz", 1e-6] : f < 1 ? ["mHz", 1e-3] : f < 1e4 ? ["Hz", 1] : ["kHz", 1e3];
  return withUnit(f / (factor as number), unit as string, digits);
}

/** A unit squared: m², (m3/s)². */
export const squared = (unit: string): string => (/^\p{L}+$/u.test(unit) ? `${unit}²` : `(${unit})²`);

/** A frequency and its period: 2 mHz (8.33 min). */
export function withPeriod(f: number | null | undefined, digits = 4): string {
  if (f === null || f === undefined) return "–";
  return f === 0 ? hertz(0) : `${hertz(f, digits)} (${duration(1 / f, digits)})`;
}

export function edges(f: number | number[] | null): string {
  if (f === null) return "–";
  return Array.isArray(f) ? f.map((x) => withPeriod(x)).join(" and ") : withPeriod(f);
}

/** Time for people: without the T, fraction only where there is one. */
export const timeForPeople = (iso: string | null): string =>
  iso === null ? "–" : iso.replace("T", " ").replace("Z", " UTC");

export const percent = (x: number | null): string => (x === null ? "–" : `${number(x)}${NARROW}%`);
export const dB = (x: number | null): string =>
  x === null
    ? "–"
    : x <= -399
      ? `below ${MINUS}399${NARROW}dB`
      : `${number(Math.round(x * 100) / 100)}${NARROW}dB`;
