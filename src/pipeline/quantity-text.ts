/** Quantities back as text that the parsers read. */
import type { Frequency } from "./quantities.ts";

const TIME_STEPS: readonly (readonly [unit: string, seconds: number, up_to: number])[] = [
  ["us", 1e-6, 1e-3],
  ["ms", 1e-3, 1],
  ["s", 1, 120],
  ["min", 60, 7200],
  ["h", 3600, 172_800],
  ["d", 86_400, Number.POSITIVE_INFINITY],
];
const HERTZ_STEPS: readonly (readonly [unit: string, hertz: number, up_to: number])[] = [
  ["uHz", 1e-6, 1e-3],
  ["mHz", 1e-3, 1],
  ["Hz", 1, 1e3],
  ["kHz", 1e3, Number.POSITIVE_INFINITY],
];

/** A number longer than this does not read well in minutes, hours or days, and may not be exact there. */
const READABLE = 8;

/**
 * A length of time in the unit that reads best: `10 ms`, `90 s`, `10 min`.
 * @param seconds  0 or more
 * @param digits   significant digits; left out: as many as give whole microseconds back exactly
 */
export function formatDuration(seconds: number, digits = 15): string {
  if (seconds === 0) return "0 s";
  const [unit, size] = TIME_STEPS.find(([, , upTo]) => seconds < upTo)!;
  const number = String(Number((seconds / size).toPrecision(digits)));
  return size > 1 && number.length > READABLE
    ? `${Number(seconds.toPrecision(digits))} s`
    : `${number} ${unit}`;
}

/**
 * A frequency with its period beside it: `2 mHz (8.33 min)`.
 * @param hz      0 or more
 * @param digits  significant digits; left out: as many as give the number back to 15 digits
 */
export function formatFrequency(hz: number, digits = 15): string {
  if (hz === 0) return "0 Hz";
  const [unit, size] = HERTZ_STEPS.find(([, , upTo]) => hz < upTo)!;
  return `${Number((hz / size).toPrecision(digits))} ${unit} (${formatDuration(1 / hz, 3)})`;
}

/** A frequency as given, with what it is the other way round: `10 min (1.667 mHz)`. */
export function describeFrequency(f: Frequency): string {
  if (f.kind === "cycles-per-sample")
    return f.value === 0 ? f.text : `${f.text} (${Number((1 / f.value).toPrecision(3))} samples)`;
  if (f.hz === 0) return "0 Hz";
  if (/Hz$/.test(f.text)) return `${f.text} (${formatDuration(1 / f.hz, 3)})`;
  return `${f.text} (${formatFrequency(f.hz, 4).split(" (")[0]})`;
}
