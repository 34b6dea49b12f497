/** Kinds of time and frequency: lengths, rates, frequencies, points in time, rates of change. */
import { INSTANT_PATTERN } from "./instant.ts";
import { type Kind, type KindFacts, quantityKind } from "./kind.ts";
import {
  type Duration,
  type Frequency,
  type Instant,
  PATTERNS,
  parseDuration,
  parseFrequency,
  parseInstant,
  parseRate,
  parseRateOfChange,
  type Rate,
  type RateOfChange,
  type Refused,
} from "./quantities.ts";
import { matching, span, type Told, withDefault } from "./told.ts";

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
    example: o.example ?? o.default ?? o.min ?? (o.zero === true ? "0 s" : "10 s"),
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
      example: o.example ?? o.default ?? "1 min",
      json: matching(PATTERNS.durationOrRate),
    },
    (given): Duration | Refused => {
      if (!/Hz\s*$/i.test(given)) return parseDuration(given);
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
      example: o.example ?? o.default ?? (o.zero === true ? "0 Hz" : "0.5 Hz"),
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
      example: o.example ?? o.default ?? "10 Hz",
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
      example: o.example ?? o.default ?? "2031-03-04T00:00:00Z",
      json: matching(INSTANT_PATTERN),
    },
    parseInstant,
    (t) => ({ is: t }),
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
      example: o.example ?? o.default ?? "0.5 m/s",
      json: matching(PATTERNS.rateOfChange),
    },
    parseRateOfChange,
    (r) => ({ is: r }),
    o.default,
  );
}
