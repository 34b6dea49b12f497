import { quoted } from "../diagnostics.ts";
import type { Refused } from "./quantities.ts";

/** A point in time. */
export interface Instant {
  /** Integer microseconds since 1970-01-01T00:00:00Z. */
  readonly us: number;
  readonly text: string;
}

/** JSON Schema pattern of the texts that `parseInstant` takes. */
export const INSTANT_PATTERN = String.raw`^\s*\d{4}-\d{2}-\d{2}(?:[T ]\d{2}:\d{2}(?::\d{2}(?:\.\d{1,6})?)?(?:Z|[+-]\d{2}:?\d{2}))?\s*$`;

const FORM =
  /^(\d{4})-(\d{2})-(\d{2})(?:[T ](\d{2}):(\d{2})(?::(\d{2})(?:\.(\d+))?)?(Z|([+-])(\d{2}):?(\d{2}))?)?$/;
/** Microseconds stay exact in a float64 up to the year 2255. */
const LAST_YEAR = 2254;
const FIRST_YEAR = 1700;

/**
 * ISO 8601: a date (its midnight in UTC), or date and time with Z or an offset, to the microsecond.
 * Local times are not taken: which time they mean depends on the place.
 */
export function parseInstant(text: string): Instant | Refused {
  const clean = text.trim();
  const refused = (allowed: string, todo: string): Refused => ({
    error: { given: clean === "" ? "an empty text" : quoted(clean), allowed, todo },
  });
  const match = FORM.exec(clean);
  if (match === null)
    return refused("a time in ISO 8601, with Z or an offset", "write for instance 2031-03-04T00:00:00Z");
  const [
    ,
    year,
    month,
    day,
    hour,
    minute,
    second = "0",
    fraction = "",
    zone,
    sign,
    offsetHours,
    offsetMinutes,
  ] = match;
  if (hour !== undefined && zone === undefined)
    return refused("a time with Z or an offset", `write ${clean}Z when it is in UTC`);
  if (fraction.length > 6) return refused("at most 6 digits after the second's point", "use fewer digits");
  const [y, mo, d] = [Number(year), Number(month), Number(day)];
  const [h, mi, s] = [Number(hour ?? 0), Number(minute ?? 0), Number(second)];
  const midnight = Date.UTC(y, mo - 1, d);
  const date = new Date(midnight);
  if (y < FIRST_YEAR || y > LAST_YEAR)
    return refused(`a year from ${FIRST_YEAR} to ${LAST_YEAR}`, "correct the year");
  if (date.getUTCMonth() !== mo - 1 || date.getUTCDate() !== d || mo < 1)
    return refused("a day of the calendar", "correct the month or the day");
  if (h > 23 || mi > 59 || s > 59 || Number(offsetHours ?? 0) > 14 || Number(offsetMinutes ?? 0) > 59)
    return refused("00:00:00 to 23:59:59, offsets up to 14:00", "correct the time of day");
  const offset_s =
    (sign === "-" ? -1 : 1) * (Number(offsetHours ?? 0) * 3600 + Number(offsetMinutes ?? 0) * 60);
  const seconds = midnight / 1000 + h * 3600 + mi * 60 + s - offset_s;
  return { us: seconds * 1e6 + Number(fraction.padEnd(6, "0")), text: clean };
}

/** The same the other way, to the microsecond where it needs to be. */
export function isoInstant(us: number): string {
  const second = Math.floor(us / 1e6);
  const rest = us - second * 1e6;
  const whole = new Date(second * 1000).toISOString().slice(0, 19);
  return `${whole}${rest === 0 ? "" : `.${String(rest).padStart(6, "0").replace(/0+$/, "")}`}Z`;
}
