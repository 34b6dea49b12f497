/**
 * Quantities as people write them: a number and a unit. Durations are held exactly, as rational
 * microseconds; failure is a value that says what was given, what is allowed and what to do.
 */
import { quoted } from "../diagnostics.ts";

/** In lowest terms, den > 0. */
export interface Rational {
  readonly num: number;
  readonly den: number;
}

export interface QuantityError {
  readonly error: { readonly given: string; readonly allowed: string; readonly todo: string };
}

export interface Duration {
  /** Exact microseconds. */
  readonly us: Rational;
  readonly seconds: number;
  readonly text: string;
}

export type Frequency =
  | { readonly kind: "hertz"; readonly hz: number; readonly text: string }
  | { readonly kind: "cycles-per-sample"; readonly value: number; readonly text: string };

export interface Rate {
  readonly interval_us: Rational;
  readonly hz: number;
  readonly text: string;
}

export interface Instant {
  /** Integer microseconds since 1970-01-01T00:00:00Z. */
  readonly us: number;
  readonly text: string;
}

const NUMBER = "[+-]?(?:\\d+(?:\\.\\d*)?|\\.\\d+)(?:[eE][+-]?\\d+)?";
/** A number, or a ratio of whole numbers such as 1/360. */
const AMOUNT = `(?:${NUMBER}|\\d+/\\d+)`;

/** Exact microseconds in each unit, as big integers over a power of ten. */
const TIME_US: Record<string, bigint> = {
  us: 1n,
  µs: 1n,
  μs: 1n,
  ms: 1_000n,
  s: 1_000_000n,
  min: 60_000_000n,
  h: 3_600_000_000n,
  d: 86_400_000_000n,
  wk: 604_800_000_000n,
};
const FREQUENCY_HZ: Record<string, readonly [bigint, bigint]> = {
  uHz: [1n, 1_000_000n],
  µHz: [1n, 1_000_000n],
  μHz: [1n, 1_000_000n],
  mHz: [1n, 1_000n],
  Hz: [1n, 1n],
  kHz: [1_000n, 1n],
  MHz: [1_000_000n, 1n],
};

const units = (table: Record<string, unknown>) => Object.keys(table).join("|");
export const DURATION_PATTERN = `^\\s*${AMOUNT}\\s*(?:${units(TIME_US)})\\s*$`;
export const FREQUENCY_PATTERN = `^\\s*${AMOUNT}\\s*(?:${units(FREQUENCY_HZ)}|cycles/sample|${units(TIME_US)})\\s*$`;
export const RATE_PATTERN = `^\\s*${AMOUNT}\\s*(?:${units(FREQUENCY_HZ)})\\s*$`;
export const DECIBEL_PATTERN = `^\\s*${NUMBER}\\s*dB\\s*$`;
export const PERCENT_PATTERN = `^\\s*${NUMBER}\\s*%\\s*$`;
export const INSTANT_PATTERN =
  "^\\d{4}-\\d{2}-\\d{2}(?:[T ]\\d{2}:\\d{2}(?::\\d{2}(?:\\.\\d{1,6})?)?(?:Z|[+-]\\d{2}:\\d{2}))?$";

interface Amount {
  readonly num: bigint;
  readonly den: bigint;
  readonly unit: string;
}

/** Reads amount and unit exactly; undefined when the text is not one. */
function amountOf(text: string): Amount | undefined {
  const found = new RegExp(`^\\s*(?:(${NUMBER})|(\\d+)/(\\d+))\\s*([^\\s\\d].*?)?\\s*$`, "u").exec(text);
  if (found === null) return undefined;
  const unit = found[4] ?? "";
  if (found[1] === undefined) {
    const den = BigInt(found[3]!);
    return den === 0n ? undefined : { num: BigInt(found[2]!), den, unit };
  }
  const [, sign, whole, fraction, exponent] = /^([+-]?)(\d*)\.?(\d*)(?:[eE]([+-]?\d+))?$/.exec(found[1])!;
  const power = Number(exponent ?? 0) - fraction!.length;
  if (Math.abs(power) > 40) return undefined;
  const digits = BigInt(`${whole}${fraction}` || "0") * (sign === "-" ? -1n : 1n);
  return power >= 0
    ? { num: digits * 10n ** BigInt(power), den: 1n, unit }
    : { num: digits, den: 10n ** BigInt(-power), unit };
}

function lowest(num: bigint, den: bigint): Rational | undefined {
  let a = num < 0n ? -num : num;
  let b = den;
  while (b > 0n) [a, b] = [b, a % b];
  const n = num / a;
  const d = den / a;
  return n * d < 2n ** 52n ? { num: Number(n), den: Number(d) } : undefined;
}

const failure = (text: string, allowed: string, todo: string): QuantityError => ({
  error: { given: text === "" ? "nothing" : quoted(text), allowed, todo },
});

/** `10 ms`, `2.5 s`, `1/360 s`, `1 d`: more than zero, and exactly a rational number of microseconds. */
export function parseDuration(text: string): Duration | QuantityError {
  const allowed = "a length of time with its unit: us, ms, s, min, h, d, wk";
  const amount = amountOf(text);
  if (amount === undefined) return failure(text, allowed, "write for instance 10 s");
  const unit = TIME_US[amount.unit];
  if (unit === undefined)
    return failure(
      text,
      allowed,
      amount.unit === "" ? `add the unit, for instance ${text.trim()} s` : `${quoted(amount.unit)} is not a unit of time; write for instance 10 s`,
    );
  const num = amount.num * unit;
  if (num < 0n) return failure(text, "a length of time that is not negative", "take the minus sign away");
  if (num === 0n) return { us: { num: 0, den: 1 }, seconds: 0, text: text.trim() };
  const us = lowest(num, amount.den);
  if (us === undefined) return failure(text, "a length of time that can be held exactly", "use fewer digits");
  return { us, seconds: us.num / us.den / 1e6, text: text.trim() };
}

/** `0.5 Hz`, `2 mHz`, `0.1 cycles/sample`, or a period such as `10 min`. */
export function parseFrequency(text: string): Frequency | QuantityError {
  const allowed = "a frequency (uHz, mHz, Hz, kHz, cycles/sample) or a period (us, ms, s, min, h, d)";
  const amount = amountOf(text);
  if (amount === undefined) return failure(text, allowed, "write for instance 0.5 Hz");
  const value = ratio(amount.num, amount.den);
  if (value < 0) return failure(text, "a frequency that is not negative", "take the minus sign away");
  if (amount.unit === "cycles/sample") return { kind: "cycles-per-sample", value, text: text.trim() };
  const hertz = FREQUENCY_HZ[amount.unit];
  if (hertz !== undefined)
    return { kind: "hertz", hz: ratio(amount.num * hertz[0], amount.den * hertz[1]), text: text.trim() };
  const period = TIME_US[amount.unit];
  if (period === undefined)
    return failure(
      text,
      allowed,
      amount.unit === "" ? `add the unit, for instance ${text.trim()} Hz` : `${quoted(amount.unit)} is not a unit of frequency; write for instance 0.5 Hz`,
    );
  if (amount.num === 0n) return failure(text, "a period above zero", "write the period, or 0 Hz");
  return { kind: "hertz", hz: ratio(amount.den * 1_000_000n, amount.num * period), text: text.trim() };
}

/** `100 Hz`: held as its exact interval. */
export function parseRate(text: string): Rate | QuantityError {
  const allowed = "a sampling rate: mHz, Hz, kHz";
  const amount = amountOf(text);
  const hertz = amount === undefined ? undefined : FREQUENCY_HZ[amount.unit];
  if (amount === undefined || hertz === undefined)
    return failure(text, allowed, amount?.unit === "" ? `add the unit, for instance ${text.trim()} Hz` : "write for instance 100 Hz");
  if (amount.num <= 0n) return failure(text, "a sampling rate above zero", "write for instance 100 Hz");
  const interval_us = lowest(amount.den * hertz[1] * 1_000_000n, amount.num * hertz[0]);
  if (interval_us === undefined) return failure(text, "a rate that can be held exactly", "use fewer digits");
  return { interval_us, hz: ratio(amount.num * hertz[0], amount.den * hertz[1]), text: text.trim() };
}

/** `-60 dB` as -60. */
export function parseDecibels(text: string): number | QuantityError {
  const amount = amountOf(text);
  if (amount?.unit !== "dB")
    return failure(text, "a number of decibels", amount?.unit === "" ? `add the unit: ${text.trim()} dB` : "write for instance 60 dB");
  return ratio(amount.num, amount.den);
}

/** `80 %` as 0.8. */
export function parsePercent(text: string): number | QuantityError {
  const amount = amountOf(text);
  if (amount?.unit !== "%")
    return failure(text, "a percentage", amount?.unit === "" ? `add the sign: ${text.trim()} %` : "write for instance 80 %");
  return ratio(amount.num, amount.den * 100n);
}

/** ISO 8601 with Z or an offset, to the microsecond; a date alone is its midnight in UTC. */
export function parseInstant(text: string): Instant | QuantityError {
  const todo = "write for instance 2031-03-04T00:00:00Z";
  const allowed = "an ISO 8601 time with Z or an offset";
  const found = new RegExp(INSTANT_PATTERN).exec(text.trim());
  if (found === null) return failure(text, allowed, todo);
  const [day, rest] = [text.trim().slice(0, 10), text.trim().slice(11)];
  const clock = /^(\d{2}):(\d{2})(?::(\d{2})(?:\.(\d{1,6}))?)?(?:Z|([+-])(\d{2}):(\d{2}))$/.exec(rest);
  const [y, m, d] = day.split("-").map(Number) as [number, number, number];
  const midnight = Date.UTC(y, m - 1, d);
  const date = new Date(midnight);
  if (date.getUTCMonth() !== m - 1 || date.getUTCDate() !== d) return failure(text, "a day that the calendar has", todo);
  if (rest === "") return { us: midnight * 1000, text: text.trim() };
  if (clock === null) return failure(text, allowed, todo);
  const [, hh, mm, ss = "0", fraction = "", sign, oh = "0", om = "0"] = clock;
  if (Number(hh) > 23 || Number(mm) > 59 || Number(ss) > 59 || Number(oh) > 23 || Number(om) > 59)
    return failure(text, "hours to 23, minutes and seconds to 59", todo);
  const offset = (sign === "-" ? -1 : 1) * (Number(oh) * 60 + Number(om));
  const us =
    midnight * 1000 +
    (Number(hh) * 3600 + (Number(mm) - offset) * 60 + Number(ss)) * 1e6 +
    Number(fraction.padEnd(6, "0"));
  return { us, text: text.trim() };
}

/** Nearest double to a ratio of big integers. */
function ratio(num: bigint, den: bigint): number {
  const small = (x: bigint) => x < 2n ** 53n && x > -(2n ** 53n);
  if (small(num) && small(den)) return Number(num) / Number(den);
  // 20 digits more than a double holds, then the platform's own rounding of decimal text.
  const scaled = (num * 10n ** 40n) / den;
  return Number(`${scaled}e-40`);
}
