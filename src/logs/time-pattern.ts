/**
 * Times written by a Unicode date pattern, such as dd/MM/yyyy HH:mm:ss.SSS.
 *
 * Reference: Unicode Technical Standard 35 (LDML), part 4, "Date Field Symbol Table". Month and day names are
 * the English ones. Two words of our own stand where no symbol exists: `seconds-of-day` (0 to 86400, with
 * decimals) and `decimal-day` (1.5 is noon of 1 January, with a year beside it).
 */
import { daysFromCivil, daysInMonth, isLeapYear, MICROSECONDS_PER_DAY, type TimeCell } from "./iso-time.ts";

const MONTHS = [
  ["jan", "january"],
  ["feb", "february"],
  ["mar", "march"],
  ["apr", "april"],
  ["may", "may"],
  ["jun", "june"],
  ["jul", "july"],
  ["aug", "august"],
  ["sep", "september"],
  ["oct", "october"],
  ["nov", "november"],
  ["dec", "december"],
];
const DAY_NAMES =
  "(?:mon|tue|wed|thu|fri|sat|sun|monday|tuesday|wednesday|thursday|friday|saturday|sunday)\\.?";
const OFFSET = "(z|utc|gmt|[+-]\\d\\d(?::?\\d\\d)?)";

type Field =
  | "year"
  | "shortYear"
  | "month"
  | "monthName"
  | "day"
  | "dayOfYear"
  | "decimalDay"
  | "hour"
  | "hour12"
  | "half"
  | "minute"
  | "second"
  | "fraction"
  | "secondsOfDay"
  | "offset";

interface Symbol_ {
  readonly field: Field;
  /** Digits at most, for fields that are whole numbers. */
  readonly digits?: number;
}

const SYMBOLS: Record<string, (count: number) => Symbol_ | null> = {
  y: (n) => (n === 2 ? { field: "shortYear", digits: 2 } : { field: "year", digits: 4 }),
  u: (n) => (n === 2 ? null : { field: "year", digits: 4 }),
  M: (n) => (n > 2 ? { field: "monthName" } : { field: "month", digits: 2 }),
  L: (n) => (n > 2 ? { field: "monthName" } : { field: "month", digits: 2 }),
  d: (n) => (n > 2 ? null : { field: "day", digits: 2 }),
  D: (n) => (n > 3 ? null : { field: "dayOfYear", digits: 3 }),
  H: (n) => (n > 2 ? null : { field: "hour", digits: 2 }),
  k: (n) => (n > 2 ? null : { field: "hour", digits: 2 }),
  h: (n) => (n > 2 ? null : { field: "hour12", digits: 2 }),
  K: (n) => (n > 2 ? null : { field: "hour12", digits: 2 }),
  m: (n) => (n > 2 ? null : { field: "minute", digits: 2 }),
  s: (n) => (n > 2 ? null : { field: "second", digits: 2 }),
  S: () => ({ field: "fraction" }),
  a: () => ({ field: "half" }),
  X: () => ({ field: "offset" }),
  x: () => ({ field: "offset" }),
  Z: () => ({ field: "offset" }),
  z: () => ({ field: "offset" }),
};

/** A series of logs asks for the same patterns again and again. */
const compiled = new Map<string, TimePattern | string>();
const COMPILED_KEPT = 1000;

/** A pattern that was understood. */
export class TimePattern {
  readonly hasDate: boolean;
  readonly hasShortYear: boolean;
  private readonly expression: RegExp;
  private readonly groups: readonly (readonly Symbol_[])[];
  private readonly pivot: number;
  private readonly values = new Map<Field, string>();

  private constructor(expression: RegExp, groups: readonly (readonly Symbol_[])[], pivot: number) {
    this.expression = expression;
    this.groups = groups;
    this.pivot = pivot;
    const fields = new Set(groups.flat().map((s) => s.field));
    this.hasDate = fields.has("year") || fields.has("shortYear");
    this.hasShortYear = fields.has("shortYear");
  }

  /**
   * @param pivot  first of the hundred years that two-digit years stand for
   * @returns the pattern, or a sentence that says what is wrong with it
   */
  static compile(pattern: string, pivot: number): TimePattern | string {
    const key = `${pivot} ${pattern}`;
    const known = compiled.get(key);
    if (known !== undefined) return known;
    const made = TimePattern.make(pattern, pivot);
    if (compiled.size < COMPILED_KEPT) compiled.set(key, made);
    return made;
  }

  private static make(pattern: string, pivot: number): TimePattern | string {
    const groups: Symbol_[][] = [];
    let source = "";
    let run: Symbol_[] = [];
    const closeRun = (): void => {
      if (run.length === 0) return;
      const width = run.reduce((sum, s) => sum + s.digits!, 0);
      // Numbers that touch are cut by their widths; where no year leads, zeros in front may be missing (10 is 00:10).
      const exact = run[0]!.field === "year" || run[0]!.field === "shortYear";
      source += exact ? `(\\d{${width}})` : `(\\d{1,${width}})`;
      groups.push(run);
      run = [];
    };
    const tokens =
      pattern.match(/seconds-of-day|decimal-day|'(?:[^']|'')*'|([A-Za-z])\1*|\s+|[^A-Za-z'\s]|'/g) ?? [];
    for (const [i, token] of tokens.entries()) {
      if (token === "seconds-of-day" || token === "decimal-day") {
        closeRun();
        groups.push([{ field: token === "decimal-day" ? "decimalDay" : "secondsOfDay" }]);
        source += "(\\d+(?:[.,]\\d*)?)";
      } else if (/^[A-Za-z]/.test(token) && token !== "T") {
        if (token[0] === "E") {
          closeRun();
          source += DAY_NAMES;
          continue;
        }
        const symbol = SYMBOLS[token[0]!]?.(token.length) ?? null;
        if (symbol === null) return wrongSymbol(token);
        if (symbol.digits !== undefined) run.push(symbol);
        else {
          closeRun();
          groups.push([symbol]);
          source = withField(source, symbol.field);
        }
      } else {
        closeRun();
        const text = token.startsWith("'")
          ? token === "''"
            ? "'"
            : token.slice(1, -1).replaceAll("''", "'")
          : token;
        // The decimal sign before a fraction may be missing together with it.
        const fractionNext = /^S/.test(tokens[i + 1] ?? "") && /^[.,]$/.test(text);
        if (!fractionNext)
          source += /^\s+$/.test(text) ? "\\s+" : text.replace(/[.*+?^${}()|[\]\\/]/g, "\\$&");
        else if (!/(?:s|seconds-of-day)$/.test(tokens[i - 1] ?? ""))
          return "a fraction must follow the seconds";
      }
    }
    closeRun();
    const fields = groups.flat().map((s) => s.field);
    const wrong = inconsistency(fields);
    return wrong ?? new TimePattern(new RegExp(`^${source}$`, "iu"), groups, pivot);
  }

  /** Reads one cell into `into`; a time without date counts from midnight. False when it is not such a time. */
  read(cell: string, into: TimeCell): boolean {
    into.offset_us = null;
    into.rounded = false;
    into.leapSecond = false;
    const match = this.expression.exec(cell);
    if (match === null) return false;
    const { values, groups } = this;
    values.clear();
    for (let g = 0; g < groups.length; g++) {
      const text = match[g + 1];
      if (text === undefined) continue;
      const symbols = groups[g]!;
      if (symbols.length === 1) values.set(symbols[0]!.field, text);
      else splitByWidth(text, symbols, values);
    }
    const day = this.day();
    const time_us = this.timeOfDay(into);
    if (Number.isNaN(day) || Number.isNaN(time_us)) return false;
    into.local_us = day * MICROSECONDS_PER_DAY + time_us;
    const offset = values.get("offset");
    if (offset !== undefined) into.offset_us = offsetOf(offset);
    return true;
  }

  private number(field: Field, otherwise: number): number {
    const text = this.values.get(field);
    return text === undefined ? otherwise : Number(text);
  }

  private day(): number {
    if (!this.hasDate) return 0;
    let year = this.number("year", -1);
    if (year < 0) {
      const short = this.number("shortYear", 0);
      year = this.pivot + ((((short - this.pivot) % 100) + 100) % 100);
    }
    const ordinal = this.number("dayOfYear", -1);
    const last = isLeapYear(year) ? 366 : 365;
    if (ordinal >= 0)
      return ordinal >= 1 && ordinal <= last ? daysFromCivil(year, 1, 1) + ordinal - 1 : Number.NaN;
    const decimal = this.values.get("decimalDay");
    if (decimal !== undefined) {
      const whole = Number.parseInt(decimal, 10);
      return whole >= 1 && whole <= last ? daysFromCivil(year, 1, 1) + whole - 1 : Number.NaN;
    }
    const name = this.values.get("monthName")?.toLowerCase().slice(0, 3);
    const month = name === undefined ? this.number("month", 1) : MONTHS.findIndex((m) => m[0] === name) + 1;
    const day = this.number("day", 1);
    if (month < 1 || month > 12 || day < 1 || day > daysInMonth(year, month)) return Number.NaN;
    return daysFromCivil(year, month, day);
  }

  /** Microseconds since midnight, or NaN. */
  private timeOfDay(into: TimeCell): number {
    const decimal = this.values.get("decimalDay");
    if (decimal !== undefined) return microsOf(decimal.replace(/^\d+/, "0"), 86_400, into);
    const seconds = this.values.get("secondsOfDay");
    if (seconds !== undefined) {
      const micros = microsOf(seconds, 1, into);
      return micros <= MICROSECONDS_PER_DAY ? micros : Number.NaN;
    }
    const half = this.values.get("half")?.[0]?.toLowerCase();
    let hour = this.number("hour", 0);
    const hour12 = this.number("hour12", -1);
    if (hour12 >= 0) {
      if (hour12 > 12) return Number.NaN;
      hour = (hour12 % 12) + (half === "p" ? 12 : 0);
    }
    const minute = this.number("minute", 0);
    const second = this.number("second", 0);
    const micros = microsOf(`0.${this.values.get("fraction") ?? "0"}`, 1, into);
    if (hour > 24 || minute > 59 || second > 60) return Number.NaN;
    if (hour === 24 && (minute > 0 || second > 0 || micros > 0)) return Number.NaN;
    into.leapSecond = second === 60;
    return ((hour * 60 + minute) * 60 + second) * 1e6 + (into.leapSecond ? 0 : micros);
  }
}

function withField(source: string, field: Field): string {
  if (field === "fraction") return `${source}(?:[.,](\\d+))?`;
  if (field === "half") return `${source}([ap]\\.?m\\.?)`;
  if (field === "offset") return `${source.replace(/\\s\+$/, "\\s*")}${OFFSET}`;
  return `${source}(${MONTHS.map(([short, long]) => `${long}|${short}`).join("|")}|sept)\\.?`;
}

function splitByWidth(text: string, symbols: readonly Symbol_[], into: Map<Field, string>): void {
  const padded = text.padStart(
    symbols.reduce((sum, s) => sum + s.digits!, 0),
    "0",
  );
  let at = 0;
  for (const { field, digits } of symbols) {
    into.set(field, padded.slice(at, at + digits!));
    at += digits!;
  }
}

function wrongSymbol(token: string): string {
  if (token.startsWith("Y")) return `${token} is the year of ISO weeks; the calendar year is yyyy`;
  return `${token} is not a date symbol that can be read; text in a pattern stands in single quotes`;
}

function inconsistency(fields: readonly Field[]): string | null {
  const twice = fields.find((field, i) => fields.indexOf(field) !== i);
  if (twice === "minute") return "mm is minutes; months are MM";
  if (twice === "month") return "MM is months; minutes are mm";
  if (twice !== undefined) return `the ${twice} stands in it twice`;
  const has = (field: Field): boolean => fields.includes(field);
  const year = has("year") || has("shortYear");
  const month = has("month") || has("monthName");
  if (year && !has("dayOfYear") && !has("decimalDay") && !(month && has("day")))
    return "a year needs a month and a day, or a day of the year";
  if (!year && (month || has("day") || has("dayOfYear") || has("decimalDay")))
    return "the year is missing (yyyy)";
  if (has("hour12") && !has("half")) return "hours to 12 (h) need the half of the day (a); hours to 24 are H";
  if (!year && !has("hour") && !has("hour12") && !has("secondsOfDay"))
    return "it holds neither date nor time";
  return null;
}

/** A decimal number times `factor` seconds, in microseconds rounded half up; exact up to 15 decimals. */
function microsOf(text: string, factor: number, into: TimeCell): number {
  const [whole, decimals = ""] = text.split(/[.,]/);
  const scale = 10n ** BigInt(decimals.length);
  const scaled = BigInt(`${whole}${decimals}`) * BigInt(factor) * 1_000_000n;
  const rest = scaled % scale;
  if (rest !== 0n) into.rounded = true;
  return Number(scaled / scale) + (rest * 2n >= scale ? 1 : 0);
}

function offsetOf(text: string): number {
  const match = /^([+-])(\d\d):?(\d\d)?$/.exec(text);
  if (match === null) return 0;
  const offset = (Number(match[2]) * 60 + Number(match[3] ?? "0")) * 60e6;
  return match[1] === "-" && offset > 0 ? -offset : offset;
}
