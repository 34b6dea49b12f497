/** The kinds of settings, one function each; every stage's settings and the pipeline file are made of them. */
import { nearestName } from "../diagnostics.ts";
import { INSTANT_PATTERN } from "./instant.ts";
import { type Kind, type KindFacts, Misfit, makeKind, quantityKind, shown, wrongType } from "./kind.ts";
import {
  type Duration,
  type Frequency,
  type Instant,
  type Level,
  PATTERNS,
  parseDecibels,
  parseDuration,
  parseFrequency,
  parseInstant,
  parsePercent,
  parsePpm,
  parseRate,
  parseRateOfChange,
  type Rate,
  type RateOfChange,
  type Refused,
} from "./quantities.ts";

export { list, record, stageSettings, strictObject } from "./collections.ts";
export { factsOf, type JsonSchema, type Kind, type KindFacts } from "./kind.ts";
export { name, text } from "./texts.ts";

/** What every kind is told: one sentence, and the default as it would stand in the file. */
interface Told<D> {
  readonly about: string;
  readonly default?: D;
}
interface Range {
  readonly min?: number;
  readonly max?: number;
}

const matching = (pattern: string) => () => ({ type: "string", pattern });
const withDefault = (d: string | number | boolean | undefined) =>
  d === undefined ? {} : { default: String(d) };

const TIME_UNITS = "us, ms, s, min, h, d, wk";
const HERTZ_UNITS = "uHz, mHz, Hz, kHz";

interface DurationTold extends Told<string> {
  /** Takes 0 too. */
  readonly zero?: boolean;
  /** Shortest and longest length, as text. */
  readonly min?: string;
  readonly max?: string;
}

/** A length of time, above zero unless `zero` is set. */
export function duration(o: DurationTold): Kind<Duration> {
  return quantityKind(durationFacts(o), parseDuration, (d) => inDurationRange(d, o), o.default);
}

function durationFacts(o: DurationTold): KindFacts {
  const bounds =
    o.min !== undefined || o.max !== undefined
      ? span(o.min, o.max)
      : o.zero === true
        ? "0 s or more"
        : "longer than 0 s";
  return {
    kind: "length of time",
    about: o.about,
    unit: TIME_UNITS,
    ...withDefault(o.default),
    allowed: `a number with one of ${TIME_UNITS}; ${bounds}`,
    example: o.default ?? o.min ?? "10 s",
    json: matching(PATTERNS.duration),
  };
}

function inDurationRange(d: Duration, o: DurationTold) {
  const seconds = (limit: string) => {
    const parsed = parseDuration(limit);
    if ("error" in parsed) throw new Error(`limit ${limit} is not a length of time`);
    return parsed.seconds;
  };
  if (d.seconds === 0 && o.zero !== true)
    return { problem: "the length of time is zero", todo: "write a length above zero" };
  if (o.min !== undefined && d.seconds < seconds(o.min))
    return { problem: "the length of time is too short", todo: `write ${o.min} or more` };
  if (o.max !== undefined && d.seconds > seconds(o.max))
    return { problem: "the length of time is too long", todo: `write ${o.max} or less` };
  return { is: d };
}

/** A length of time or one of some words: `durationOr(["whole"], …)`. */
export function durationOr<const W extends string>(words: readonly W[], o: DurationTold): Kind<Duration | W> {
  const plain = durationFacts(o);
  const facts = {
    ...plain,
    kind: `${plain.kind} or ${words.join(" or ")}`,
    allowed: `${words.join(", ")}; or ${plain.allowed}`,
    json: () => ({ anyOf: [{ enum: [...words] }, plain.json()] }),
  };
  return quantityKind<Duration | { readonly word: W }, Duration | W>(
    facts,
    (given) => {
      const word = words.find((w) => w === given);
      return word === undefined ? parseDuration(given) : { word };
    },
    (parsed) => ("word" in parsed ? { is: parsed.word } : inDurationRange(parsed, o)),
    o.default,
  );
}

/** An interval, given as such or as a rate: `1 min`, `100 Hz`. */
export function durationOrRate(o: Told<string>): Kind<Duration> {
  return quantityKind(
    {
      kind: "sample interval or rate",
      about: o.about,
      unit: `${TIME_UNITS}, or ${HERTZ_UNITS}`,
      ...withDefault(o.default),
      allowed: `an interval with one of ${TIME_UNITS}, or a rate with one of ${HERTZ_UNITS}; above zero`,
      example: o.default ?? "1 min",
      json: matching(PATTERNS.durationOrRate),
    },
    (given): Duration | Refused => {
      if (!/Hz\s*$/.test(given)) return parseDuration(given);
      const rate = parseRate(given);
      return "error" in rate ? rate : { us: rate.interval_us, seconds: 1 / rate.hz, text: rate.text };
    },
    (d) => inDurationRange(d, o),
    o.default,
  );
}

interface FrequencyTold extends Told<string> {
  /** Takes 0 Hz too. */
  readonly zero?: boolean;
  /** Takes cycles/sample (the default); false where no stage's own rate is meant. */
  readonly perSample?: boolean;
}

/** A frequency in Hz, as a period, or in cycles/sample of the stage's own rate. */
export function frequency(o: FrequencyTold): Kind<Frequency> {
  const perSample = o.perSample !== false;
  return quantityKind(
    {
      kind: "frequency",
      about: o.about,
      unit: `${HERTZ_UNITS}${perSample ? ", cycles/sample" : ""}, or a period`,
      ...withDefault(o.default),
      allowed: `a number with one of ${HERTZ_UNITS}${perSample ? ", cycles/sample" : ""}, or a period such as 10 min; ${
        o.zero === true ? "0 Hz or more" : "above 0 Hz"
      }`,
      example: o.default ?? "0.5 Hz",
      json: matching(perSample ? PATTERNS.frequency : PATTERNS.frequencyInHertz),
    },
    parseFrequency,
    (f) => {
      const size = f.kind === "hertz" ? f.hz : f.value;
      if (size === 0 && o.zero !== true)
        return { problem: "the frequency is zero", todo: "write a frequency above zero" };
      if (f.kind === "cycles-per-sample" && !perSample)
        return {
          problem: "cycles/sample has no meaning outside a stage",
          todo: "write it in Hz or as a period",
        };
      return { is: f };
    },
    o.default,
  );
}

/** A sampling rate. */
export function rate(o: Told<string>): Kind<Rate> {
  return quantityKind(
    {
      kind: "sampling rate",
      about: o.about,
      unit: HERTZ_UNITS,
      ...withDefault(o.default),
      allowed: `a number with one of ${HERTZ_UNITS}; above 0 Hz`,
      example: o.default ?? "10 Hz",
      json: matching(PATTERNS.rate),
    },
    parseRate,
    (r) => ({ is: r }),
    o.default,
  );
}

/** A point in time, ISO 8601. */
export function instant(o: Told<string>): Kind<Instant> {
  return quantityKind(
    {
      kind: "time",
      about: o.about,
      unit: "ISO 8601",
      ...withDefault(o.default),
      allowed: "a date, or a date and time with Z or an offset, in ISO 8601",
      example: o.default ?? "2031-03-04T00:00:00Z",
      json: matching(INSTANT_PATTERN),
    },
    parseInstant,
    (t) => ({ is: t }),
    o.default,
  );
}

/** Value in dB. */
export const decibels = (o: Told<string> & Range): Kind<number> =>
  level(o, "level in decibels", "dB", 1, PATTERNS.decibels, parseDecibels);
/** Value as a fraction; `min` and `max` are fractions too. */
export const percent = (o: Told<string> & Range): Kind<number> =>
  level({ min: 0, ...o }, "percentage", "%", 100, PATTERNS.percent, parsePercent);
/** Value in parts per million. */
export const ppm = (o: Told<string> & Range): Kind<number> =>
  level(o, "number of parts per million", "ppm", 1, PATTERNS.ppm, parsePpm);

function level(
  o: Told<string> & Range,
  kind: string,
  unit: string,
  scale: number,
  pattern: string,
  parse: (given: string) => Level | Refused,
): Kind<number> {
  const show = (x: number) => `${Number((x * scale).toPrecision(12))} ${unit}`;
  const bounds = span(
    o.min === undefined ? undefined : show(o.min),
    o.max === undefined ? undefined : show(o.max),
  );
  return quantityKind(
    {
      kind,
      about: o.about,
      unit,
      ...withDefault(o.default),
      allowed: `a number with ${unit}${bounds === "" ? "" : `; ${bounds}`}`,
      example: o.default ?? show(o.max ?? o.min ?? 20 / scale),
      json: matching(pattern),
    },
    parse,
    ({ value }) => {
      if (within(value, o)) return { is: value };
      const turned = within(-value, o);
      return {
        problem: `the ${kind} is out of range`,
        todo: turned ? `write ${show(-value)}` : `write a value ${bounds}`,
      };
    },
    o.default,
  );
}

/** A rate of change in the channel's unit per time. */
export function rateOfChange(o: Told<string>): Kind<RateOfChange> {
  return quantityKind(
    {
      kind: "rate of change",
      about: o.about,
      unit: "the channel's unit per us, ms, s, min, h, d or wk",
      ...withDefault(o.default),
      allowed: "a number above zero, the channel's unit, a slash and a unit of time",
      example: o.default ?? "0.5 m/s",
      json: matching(PATTERNS.rateOfChange),
    },
    parseRateOfChange,
    (r) => ({ is: r }),
    o.default,
  );
}

/** A whole number. */
export function count(o: Told<number> & { readonly min: number; readonly max: number }): Kind<number> {
  return number(o, "whole number", { type: "integer" }, Number.isInteger);
}

/** A number without a unit of its own; not infinite. */
export function finite(o: Told<number> & Range): Kind<number> {
  return number(o, "number", { type: "number" }, Number.isFinite);
}

function number(
  o: Told<number> & Range,
  kind: string,
  json: Record<string, unknown>,
  fits: (x: unknown) => boolean,
): Kind<number> {
  const bounds = span(o.min, o.max);
  const facts: KindFacts = {
    kind,
    about: o.about,
    ...withDefault(o.default),
    allowed: `a ${kind}${bounds === "" ? "" : ` ${bounds}`}`,
    example: String(o.default ?? o.min ?? o.max ?? 1),
    json: () => ({
      ...json,
      ...(o.min === undefined ? {} : { minimum: o.min }),
      ...(o.max === undefined ? {} : { maximum: o.max }),
    }),
  };
  return makeKind<number>(
    facts,
    (value) => {
      if (typeof value === "string" && value.trim() !== "" && fits(Number(value)))
        return new Misfit(`a text stands where a ${kind} is meant`, {
          code: "wrong-type",
          given: shown(value),
          allowed: facts.allowed,
          todo: `write ${value.trim()} without quotes`,
        });
      if (typeof value !== "number") return wrongType(value, `a ${kind}`, facts);
      if (fits(value) && within(value, o)) return { is: value };
      return new Misfit(fits(value) ? "the number is out of range" : `this is not a ${kind}`, {
        code: "out-of-range",
        given: shown(value),
        allowed: facts.allowed,
        todo: `write ${facts.allowed}`,
      });
    },
    o.default,
  );
}

/** One of some words. */
export function oneOf<const V extends string>(values: readonly V[], o: Told<NoInfer<V>>): Kind<V> {
  const facts: KindFacts = {
    kind: "choice",
    about: o.about,
    ...withDefault(o.default),
    allowed: values.join(", "),
    example: o.default ?? values[0]!,
    json: () => ({ enum: [...values] }),
  };
  return makeKind<V>(
    facts,
    (value) => {
      const found = values.find((v) => v === value);
      if (found !== undefined) return { is: found };
      if (typeof value === "object") return wrongType(value, "one of some words", facts);
      const near = nearestName(String(value), values);
      return new Misfit("this is not one of the choices", {
        code: "not-a-choice",
        given: shown(value),
        allowed: facts.allowed,
        todo: `write ${near ?? "one of them"}`,
      });
    },
    o.default,
  );
}

/** true or false. */
export function truth(o: Told<boolean>): Kind<boolean> {
  const facts: KindFacts = {
    kind: "true or false",
    about: o.about,
    ...withDefault(o.default),
    allowed: "true, false",
    example: String(o.default ?? true),
    json: () => ({ type: "boolean" }),
  };
  return makeKind<boolean>(
    facts,
    (value) => {
      if (typeof value === "boolean") return { is: value };
      const word = String(value).toLowerCase();
      const meant = /^(yes|on|y|1|true)$/.test(word)
        ? "true"
        : /^(no|off|n|0|false)$/.test(word)
          ? "false"
          : "true or false";
      return new Misfit("this is not true or false", {
        code: "wrong-type",
        given: shown(value),
        allowed: facts.allowed,
        todo: `write ${meant}`,
      });
    },
    o.default,
  );
}

function within(value: number, { min, max }: Range): boolean {
  return (min === undefined || value >= min) && (max === undefined || value <= max);
}

function span(min: string | number | undefined, max: string | number | undefined): string {
  if (min !== undefined && max !== undefined) return `from ${min} to ${max}`;
  if (min !== undefined) return `${min} or more`;
  return max === undefined ? "" : `${max} or less`;
}
