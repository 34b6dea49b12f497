/**
 * How values and times are written in CSV cells. Independent of locale and time zone.
 */
import { fallsOnMultiplesOf, type Grid } from "../signal/grid.ts";

/** Writes a value; an empty cell where there is none. */
export type ValueText = (value: number) => string;

/**
 * @param digits  significant digits, 1 to 17; undefined for the shortest text that reads back as the same
 *                double. Rounding is that of ECMAScript toPrecision: nearest, exact ties away from zero.
 */
export function valueText(digits: number | undefined): ValueText {
  if (digits === undefined) return (v) => (Number.isNaN(v) ? "" : String(v));
  // Through Number once more: trailing zeros go, and minus zero is written as 0.
  return (v) => (Number.isNaN(v) ? "" : String(Number(v.toPrecision(digits))));
}

/** Fraction digits that every time of a grid needs: 0, 3 or 6. */
export function timeFractionDigits(grid: Grid): 0 | 3 | 6 {
  if (fallsOnMultiplesOf(grid, 1_000_000)) return 0;
  return fallsOnMultiplesOf(grid, 1_000) ? 3 : 6;
}

/** Least fraction digits (0, 3 or 6) that write integer microseconds exactly. */
export function fractionDigitsOf(time_us: number): 0 | 3 | 6 {
  if (time_us % 1_000_000 === 0) return 0;
  return time_us % 1_000 === 0 ? 3 : 6;
}

const US_PER_DAY = 86_400_000_000;

/** ISO 8601 in UTC with Z. @param time_us integer microseconds since 1970 */
export function isoTime(time_us: number, fractionDigits: 0 | 3 | 6 = fractionDigitsOf(time_us)): string {
  const day = Math.floor(time_us / US_PER_DAY);
  return `${dayText(day)}T${clockText(time_us - day * US_PER_DAY, fractionDigits)}Z`;
}

/** Writes the times of a series, making each day's text once. */
export function isoTimeWriter(fractionDigits: 0 | 3 | 6): (time_us: number) => string {
  let day = Number.NaN;
  let text = "";
  return (time_us) => {
    const d = Math.floor(time_us / US_PER_DAY);
    if (d !== day) {
      day = d;
      text = `${dayText(d)}T`;
    }
    return `${text}${clockText(time_us - d * US_PER_DAY, fractionDigits)}Z`;
  };
}

function dayText(day: number): string {
  return new Date(day * 86_400_000).toISOString().split("T")[0]!;
}

function clockText(us: number, fractionDigits: 0 | 3 | 6): string {
  const s = Math.floor(us / 1_000_000);
  const clock = `${two(Math.floor(s / 3600))}:${two(Math.floor(s / 60) % 60)}:${two(s % 60)}`;
  if (fractionDigits === 0) return clock;
  const fraction = String(us % 1_000_000).padStart(6, "0");
  return `${clock}.${fraction.slice(0, fractionDigits)}`;
}

const two = (n: number): string => (n < 10 ? `0${n}` : String(n));
