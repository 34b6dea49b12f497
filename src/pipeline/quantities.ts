/**
 * Quantities as the pipeline file writes them: a number, a blank and an SI unit. Exact where it matters.
 * A text that cannot be used gives `{ error }`; nothing here throws.
 */
import { quoted } from "../diagnostics.ts";
import {
  type BigRational,
  DECIMAL,
  lowestTerms,
  nearestNumber,
  type Rational,
  readDecimal,
  times,
  toRational,
} from "./rational.ts";

export { type Instant, parseInstant } from "./instant.ts";
export { describeFrequency, formatDuration, formatFrequency } from "./quantity-text.ts";
export type { Rational } from "./rational.ts";

/** Why a text is no such quantity, in the words of a diagnostic. */
export interface Refused {
  readonly error: { readonly given: string; readonly allowed: string; readonly todo: string };
}

/** A length of time, 0 or more. */
export interface Duration {
  /** Exact microseconds. */
  readonly us: Rational;
  readonly seconds: number;
  /** As it stood in the file, for echoes. */
  readonly text: string;
}

/** A frequency, 0 or more: in Hz (given as such or as a period), or against a stage's own sampling rate. */
export type Frequency =
  | { readonly kind: "hertz"; readonly hz: number; readonly exact?: Rational; readonly text: string }
  | { readonly kind: "cycles-per-sample"; readonly value: number; readonly text: string };

/** A sampling rate, by its exact interval. */
export interface Rate {
  readonly interval_us: Rational;
  readonly hz: number;
  readonly text: string;
}

/** A number in the unit that the parser's name says. */
export interface Level {
  readonly value: number;
  readonly text: string;
}

export interface RateOfChange {
  /** As written: 0.5 in `0.5 m/s`. */
  readonly value: number;
  /** As written: `m/s`. */
  readonly unit: string;
  /** Unit of the changing quantity: `m`. */
  readonly channelUnit: string;
  /** Value in channel units per second. */
  readonly perSecond: number;
  readonly text: string;
}

type Units = Readonly<Record<string, BigRational>>;
const whole = (n: number): BigRational => ({ num: BigInt(n), den: 1n });
const part = (n: number): BigRational => ({ num: 1n, den: BigInt(n) });

/** Microseconds in each unit of time. */
const TIME: Units = {
  us: whole(1),
  µs: whole(1),
  ms: whole(1e3),
  s: whole(1e6),
  min: whole(60e6),
  h: whole(3600e6),
  d: whole(86_400e6),
  wk: whole(604_800e6),
};
const HERTZ: Units = { uHz: part(1e6), µHz: part(1e6), mHz: part(1e3), Hz: whole(1), kHz: whole(1e3) };
const PER_SAMPLE: Units = { "cycles/sample": whole(1) };
const DECIBELS: Units = { dB: whole(1) };
const PERCENT: Units = { "%": part(100) };
const PPM: Units = { ppm: whole(1) };

/** Spellings that are not taken but whose meaning is plain. */
const MEANT: Readonly<Record<string, string>> = {
  sec: "s",
  secs: "s",
  second: "s",
  seconds: "s",
  m: "min",
  mins: "min",
  minute: "min",
  minutes: "min",
  hr: "h",
  hrs: "h",
  hour: "h",
  hours: "h",
  day: "d",
  days: "d",
  w: "wk",
  week: "wk",
  weeks: "wk",
  msec: "ms",
  usec: "us",
  hertz: "Hz",
  "cycle/sample": "cycles/sample",
  decibel: "dB",
  decibels: "dB",
  percent: "%",
  "1/s": "Hz",
};

const TIME_WORDS = "a number and one of us, ms, s, min, h, d, wk";
const HERTZ_WORDS = "a number and one of uHz, mHz, Hz, kHz";
const FREQUENCY_WORDS = `${HERTZ_WORDS}, cycles/sample, or a period such as 10 min`;

/** JSON Schema patterns of the texts that the parsers take. */
export const PATTERNS = {
  duration: pattern([TIME], ""),
  frequency: pattern([HERTZ, PER_SAMPLE, TIME], ""),
  frequencyInHertz: pattern([HERTZ, TIME], ""),
  rate: pattern([HERTZ], ""),
  durationOrRate: pattern([TIME, HERTZ], ""),
  decibels: pattern([DECIBELS], "[+-]?"),
  percent: pattern([PERCENT], ""),
  ppm: pattern([PPM], "[+-]?"),
  rateOfChange: String.raw`^\s*${DECIMAL}\s*\S+/(?:${Object.keys(TIME).join("|")}|μs)\s*$`,
} as const;

function pattern(tables: readonly Units[], sign: string): string {
  const units = tables.flatMap((table) => Object.keys(table));
  // The micro sign and the Greek letter look alike; both are taken.
  const greek = units.filter((u) => u.startsWith("\u00b5")).map((u) => `\u03bc${u.slice(1)}`);
  return String.raw`^\s*${sign}(?:${DECIMAL}|\d+\s*/\s*\d+)\s*(?:${[...units, ...greek].join("|")})\s*$`;
}

/** `10 ms`, `1 min`, `2.5 s`, `1/360 s`: 0 or more, held exactly in microseconds. */
export function parseDuration(text: string): Duration | Refused {
  const read = readQuantity(text, TIME, TIME_WORDS, "10 s");
  if ("error" in read) return read;
  const us = toRational(read.amount);
  if (us === null)
    return refused(text, "what microseconds hold exactly, up to about 200 years", "use fewer digits");
  return { us, seconds: nearestNumber(times(read.amount, part(1e6))), text: read.text };
}

/** `0.5 Hz`, `2 mHz`, `1/3 Hz`, `0.1 cycles/sample`, or a period: `10 min`. 0 or more. */
export function parseFrequency(text: string): Frequency | Refused {
  const read = readQuantity(text, { ...HERTZ, ...PER_SAMPLE, ...TIME }, FREQUENCY_WORDS, "10 Hz");
  if ("error" in read) return read;
  if (read.unit in PER_SAMPLE)
    return { kind: "cycles-per-sample", value: nearestNumber(read.amount), text: read.text };
  if (read.unit in HERTZ) return hertz(read.amount, read.text);
  if (read.amount.num === 0n) return refused(text, "a period above zero", "write 0 Hz for a constant");
  return hertz(perSecond(read.amount), read.text);
}

function hertz(amount: BigRational, text: string): Frequency {
  const exact = toRational(amount);
  return { kind: "hertz", hz: nearestNumber(amount), ...(exact === null ? {} : { exact }), text };
}

/** Microseconds to hertz, and back. */
const perSecond = ({ num, den }: BigRational): BigRational =>
  lowestTerms({ num: den * 1_000_000n, den: num });

/** `100 Hz`, `1/3 Hz`: a sampling rate, by its exact interval in microseconds. */
export function parseRate(text: string): Rate | Refused {
  const read = readQuantity(text, HERTZ, HERTZ_WORDS, "10 Hz");
  if ("error" in read) return read;
  if (read.amount.num === 0n) return refused(text, "a rate above zero", "write for instance 10 Hz");
  const interval_us = toRational(perSecond(read.amount));
  if (interval_us === null)
    return refused(text, "a rate whose interval microseconds hold exactly", "use fewer digits");
  return { interval_us, hz: nearestNumber(read.amount), text: read.text };
}

/** `-60 dB` as -60. */
export const parseDecibels = (text: string): Level | Refused =>
  parseLevel(text, DECIBELS, "a number and dB", "40 dB", true);
/** `80 %` as 0.8. */
export const parsePercent = (text: string): Level | Refused =>
  parseLevel(text, PERCENT, "a number and %", "80 %", false);
/** `20 ppm` as 20. */
export const parsePpm = (text: string): Level | Refused =>
  parseLevel(text, PPM, "a number and ppm", "20 ppm", true);

function parseLevel(
  text: string,
  units: Units,
  allowed: string,
  example: string,
  signed: boolean,
): Level | Refused {
  const read = readQuantity(text, units, allowed, example, signed);
  return "error" in read ? read : { value: nearestNumber(read.amount), text: read.text };
}

/** `0.5 m/s`, `2 m3/s/min`: the unit of the channel, a slash, a unit of time. */
export function parseRateOfChange(text: string): RateOfChange | Refused {
  const match = new RegExp(String.raw`^(${DECIMAL})\s*(\S+)/(\S+)$`, "u").exec(text.trim());
  const amount = match === null ? null : readDecimal(match[1]!);
  const per = match === null ? undefined : unitIn(TIME, match[3]!);
  if (match === null || amount === null || per === undefined || amount.num === 0n)
    return refused(
      text,
      "a number above zero, the channel's unit, a slash and a unit of time",
      "write for instance 0.5 m/s",
    );
  const [, , channelUnit = "", time = ""] = match;
  return {
    value: nearestNumber(amount),
    unit: `${channelUnit}/${time}`,
    channelUnit,
    perSecond: nearestNumber({ num: amount.num * per.den * 1_000_000n, den: amount.den * per.num }),
    text: text.trim(),
  };
}

interface Amount {
  /** In the base unit of the table. */
  readonly amount: BigRational;
  readonly unit: string;
  readonly text: string;
}

function unitIn(units: Units, unit: string): BigRational | undefined {
  const unified = unit.replaceAll("\u03bc", "\u00b5");
  return Object.hasOwn(units, unified) ? units[unified] : undefined;
}

const QUANTITY = new RegExp(
  String.raw`^([+\-]?)(?:(\d{1,18})\s*/\s*(\d{1,18})(?![\d.])|(${DECIMAL}))\s*(.*)$`,
  "su",
);

function readQuantity(
  text: string,
  units: Units,
  allowed: string,
  example: string,
  signed = false,
): Amount | Refused {
  const clean = text.trim();
  const match = QUANTITY.exec(clean);
  if (match === null) return refused(text, allowed, `write for instance ${example}`);
  const [, sign = "", over, under, decimal, unit = ""] = match;
  const number = decimal ?? `${over}/${under}`;
  const size = unitIn(units, unit);
  if (size === undefined) return refused(text, allowed, unitAdvice(number, unit, units, example));
  if (sign !== "" && !signed) return refused(text, `${allowed}, without a sign`, `write ${number} ${unit}`);
  const value = decimal === undefined ? { num: BigInt(over!), den: BigInt(under!) } : readDecimal(decimal);
  if (value === null) return refused(text, allowed, "use fewer digits");
  if (value.den === 0n) return refused(text, allowed, "divide by something other than zero");
  const amount = times(value, size);
  return {
    amount: sign === "-" ? { num: -amount.num, den: amount.den } : amount,
    unit: unit.replaceAll("\u03bc", "\u00b5"),
    text: clean,
  };
}

function unitAdvice(number: string, unit: string, units: Units, example: string): string {
  const comma = /^,(\d+)\s*(\S*)$/u.exec(unit);
  if (comma !== null) return `write a point as decimal sign: ${number}.${comma[1]} ${comma[2]}`.trimEnd();
  if (unit === "") return `add the unit, for instance ${number}${example.slice(example.indexOf(" "))}`;
  const near =
    MEANT[unit.toLowerCase()] ??
    // Capitals matter in SI: a capital M may mean mega or milli, so that one is not guessed.
    Object.keys(units).find((u) => u.toLowerCase() === unit.toLowerCase() && !/^MHz$/i.test(unit));
  return near !== undefined && Object.hasOwn(units, near)
    ? `write ${number} ${near}`
    : `write for instance ${example}; capitals matter`;
}

function refused(text: string, allowed: string, todo: string): Refused {
  return { error: { given: text.trim() === "" ? "an empty text" : quoted(text), allowed, todo } };
}
