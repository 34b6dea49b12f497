import { MICROSECONDS_PER_DAY, readIsoTime, type TimeCell } from "./iso-time.ts";
import type { TimeForm } from "./rows.ts";
import { readUnixTime, UNIX_UNITS } from "./unix-time.ts";

/** Times at or beyond this many microseconds from 1970 (the year 2255) are not exact in a float64. */
const EXACT_LIMIT_US = 2 ** 53;

/** Why a time cell could not be used. */
export type TimeProblem = "unreadable-time" | "time-out-of-range" | "time-without-offset";

/** Turns the time cells of one log into integer microseconds since 1970-01-01T00:00:00Z. */
export class TimeReader {
  problem: TimeProblem = "unreadable-time";
  /** Cells with digits finer than a microsecond. */
  rounded = 0;
  leapSeconds = 0;
  private readonly read: (cell: string) => number;
  private readonly zone: string | undefined;
  private readonly cell: TimeCell = { local_us: 0, offset_us: null, rounded: false, leapSecond: false };

  /** @throws RangeError when no reader is known for the form */
  constructor(form: TimeForm, zone: string | undefined) {
    this.zone = zone;
    const shift = (UNIX_UNITS as Record<string, number>)[form];
    if (shift !== undefined) {
      this.read = (cell) => readUnixTime(cell, shift, () => this.rounded++);
    } else if (form === "iso-8601") {
      this.read = (cell) => this.isoTime(cell);
    } else {
      throw new RangeError(`no reader for times in the form ${form}`);
    }
  }

  /** Integer microseconds, or NaN with the reason in `problem`. */
  time(cell: string): number {
    this.problem = "unreadable-time";
    const time = this.read(cell);
    if (Math.abs(time) < EXACT_LIMIT_US) return time;
    if (!Number.isNaN(time)) this.problem = "time-out-of-range";
    return Number.NaN;
  }

  private isoTime(text: string): number {
    const { cell } = this;
    if (!readIsoTime(text, cell)) return Number.NaN;
    if (cell.offset_us === null && this.zone !== "UTC") {
      this.problem = "time-without-offset";
      return Number.NaN;
    }
    const time = cell.local_us - (cell.offset_us ?? 0);
    if (cell.leapSecond) {
      if (time % MICROSECONDS_PER_DAY !== 0) return Number.NaN;
      this.leapSeconds++;
    }
    if (cell.rounded) this.rounded++;
    return time;
  }
}
