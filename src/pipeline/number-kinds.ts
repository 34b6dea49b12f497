/** Kinds of plain numbers: counts, numbers, decibels, percentages, parts per million. */
import { type Kind, type KindFacts, Misfit, makeKind, quantityKind, shown, wrongType } from "./kind.ts";
import { type Level, PATTERNS, parseDecibels, parsePercent, parsePpm, type Refused } from "./quantities.ts";
import { matching, type Range, span, type Told, withDefault, within } from "./told.ts";

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
      example: o.example ?? o.default ?? show(o.min ?? o.max ?? 20 / scale),
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
    example: o.example ?? String(o.default ?? o.min ?? o.max ?? 1),
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
