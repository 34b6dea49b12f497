/**
 * ISO 8601 and RFC 3339 times, read digit by digit as integers.
 *
 * References: RFC 3339 (2002) section 5.6; ISO 8601:2004 sections 4.1 to 4.3 (basic and extended format,
 * ordinal and week dates, 24:00); days from civil date: H. Hinnant, "chrono-Compatible Low-Level Date
 * Algorithms" (2013).
 */

export const MICROSECONDS_PER_DAY = 86_400_000_000;

/** What was read of one time cell. Kept as one object that is filled again for every cell. */
export interface TimeCell {
  /** Integer microseconds since 1970-01-01T00:00:00 by the clock that wrote the cell. */
  local_us: number;
  /** Offset of that clock from UTC; null when the cell carries none. */
  offset_us: number | null;
  /** Digits finer than a microsecond were rounded half up. */
  rounded: boolean;
  /** 23:59:60, taken as the midnight that follows. */
  leapSecond: boolean;
}

/** Days from 1970-01-01 to a date of the proleptic Gregorian calendar. */
export function daysFromCivil(year: number, month: number, day: number): number {
  const y = month <= 2 ? year - 1 : year;
  const era = Math.floor(y / 400);
  const yearOfEra = y - era * 400;
  const dayOfYear = Math.floor((153 * (month > 2 ? month - 3 : month + 9) + 2) / 5) + day - 1;
  const dayOfEra = yearOfEra * 365 + Math.floor(yearOfEra / 4) - Math.floor(yearOfEra / 100) + dayOfYear;
  return era * 146_097 + dayOfEra - 719_468;
}

export function isLeapYear(year: number): boolean {
  return (year % 4 === 0 && year % 100 !== 0) || year % 400 === 0;
}

export function daysInMonth(year: number, month: number): number {
  if (month === 2) return isLeapYear(year) ? 29 : 28;
  return month === 4 || month === 6 || month === 9 || month === 11 ? 30 : 31;
}

const ZERO = 48;
const MINUS = 45;

class IsoReader {
  private text = "";
  private at = 0;

  read(text: string, into: TimeCell): boolean {
    this.text = text;
    this.at = 0;
    into.offset_us = null;
    into.rounded = false;
    into.leapSecond = false;
    const day = this.date();
    if (Number.isNaN(day)) return false;
    into.local_us = day * MICROSECONDS_PER_DAY;
    if (this.at === this.text.length) return true;
    const mark = this.text[this.at];
    if (mark !== "T" && mark !== "t" && mark !== " ") return false;
    this.at++;
    return this.clock(into) && this.offset(into) && this.at === this.text.length;
  }

  /** Day number, or NaN. */
  private date(): number {
    const year = this.digits(4);
    if (year < 0) return Number.NaN;
    const extended = this.accept(MINUS);
    if (this.accept(87)) {
      const week = this.digits(2);
      if (extended && !this.accept(MINUS)) return Number.NaN;
      const weekday = this.digits(1);
      return weekDate(year, week, weekday);
    }
    const from = this.at;
    while (this.at < this.text.length && isDigit(this.text.charCodeAt(this.at))) this.at++;
    const run = this.at - from;
    this.at = from;
    if (run === 3) {
      const ordinal = this.digits(3);
      return ordinal >= 1 && ordinal <= (isLeapYear(year) ? 366 : 365)
        ? daysFromCivil(year, 1, 1) + ordinal - 1
        : Number.NaN;
    }
    if (extended ? run !== 2 : run !== 4) return Number.NaN;
    const month = this.digits(2);
    if (extended && !this.accept(MINUS)) return Number.NaN;
    const day = this.digits(2);
    if (month < 1 || month > 12 || day < 1 || day > daysInMonth(year, month)) return Number.NaN;
    return daysFromCivil(year, month, day);
  }

  private clock(into: TimeCell): boolean {
    const hour = this.digits(2);
    const extended = this.accept(58);
    const minute = this.digits(2);
    if (hour < 0 || hour > 24 || minute < 0 || minute > 59) return false;
    let second = 0;
    let micros = 0;
    if (extended ? this.accept(58) : isDigit(this.text.charCodeAt(this.at))) {
      second = this.digits(2);
      if (second < 0 || second > 60) return false;
      if (this.accept(46) || this.accept(44)) {
        micros = this.fraction(into);
        if (micros < 0) return false;
      }
    }
    if (hour === 24 && (minute > 0 || second > 0 || micros > 0 || into.rounded)) return false;
    into.leapSecond = second === 60;
    // A leap second has no microseconds of its own: its fraction would repeat the second that follows.
    into.local_us += ((hour * 60 + minute) * 60 + second) * 1e6 + (into.leapSecond ? 0 : micros);
    return true;
  }

  /** Microseconds from the digits after the decimal sign, rounded half up; -1 when there are none. */
  private fraction(into: TimeCell): number {
    const from = this.at;
    let micros = 0;
    let scale = 1_000_000;
    let rest = false;
    let up = false;
    for (; this.at < this.text.length; this.at++) {
      const code = this.text.charCodeAt(this.at);
      if (!isDigit(code)) break;
      if (scale > 1) {
        scale /= 10;
        micros += (code - ZERO) * scale;
      } else {
        if (this.at - from === 6) up = code - ZERO >= 5;
        if (code !== ZERO) rest = true;
      }
    }
    if (this.at === from) return -1;
    into.rounded = rest;
    return up ? micros + 1 : micros;
  }

  private offset(into: TimeCell): boolean {
    if (this.at === this.text.length) return true;
    if (this.text[this.at] === " ") this.at++;
    if (this.accept(90) || this.accept(122)) {
      into.offset_us = 0;
      return true;
    }
    const negative = this.accept(MINUS);
    if (!negative && !this.accept(43)) return false;
    const hours = this.digits(2);
    if (hours < 0 || hours > 23) return false;
    let minutes = 0;
    const colon = this.accept(58);
    if (colon || this.at < this.text.length) minutes = this.digits(2);
    if (minutes < 0 || minutes > 59) return false;
    const offset = (hours * 60 + minutes) * 60e6;
    into.offset_us = negative && offset > 0 ? -offset : offset;
    return true;
  }

  /** The next `count` digits as an integer, or -1. */
  private digits(count: number): number {
    let value = 0;
    for (let i = 0; i < count; i++) {
      const code = this.text.charCodeAt(this.at + i);
      if (!isDigit(code)) return -1;
      value = value * 10 + code - ZERO;
    }
    this.at += count;
    return value;
  }

  private accept(code: number): boolean {
    if (this.text.charCodeAt(this.at) !== code) return false;
    this.at++;
    return true;
  }
}

function weekDate(year: number, week: number, weekday: number): number {
  if (week < 1 || week > 53 || weekday < 1 || weekday > 7) return Number.NaN;
  const monday = weekOneMonday(year);
  const day = monday + (week - 1) * 7 + weekday - 1;
  return week === 53 && day >= weekOneMonday(year + 1) ? Number.NaN : day;
}

/** The Monday of the week that holds 4 January. */
function weekOneMonday(year: number): number {
  const fourth = daysFromCivil(year, 1, 4);
  return fourth - ((((fourth + 3) % 7) + 7) % 7);
}

function isDigit(code: number): boolean {
  return code >= ZERO && code <= 57;
}

const reader = new IsoReader();

/** Reads one cell into `into`; false when it is not such a time. */
export function readIsoTime(cell: string, into: TimeCell): boolean {
  return reader.read(cell, into);
}
