import { EpochCount } from "./epoch-count.ts";
import { MICROSECONDS_PER_DAY, readIsoTime, type TimeCell } from "./iso-time.ts";
import { LocalClock } from "./local-clock.ts";
import type { TimeForm, TimeSettings } from "./rows.ts";
import { SerialDay } from "./serial-day.ts";
import { TimePattern } from "./time-pattern.ts";
import { ZoneOffsets } from "./zone-offsets.ts";

/** Times at or beyond this many microseconds from 1970 (the year 2255) are not exact in a float64. */
const EXACT_LIMIT_US = 2 ** 53;
/** First of the hundred years that two-digit years stand for, when the pipeline does not say. */
const PIVOT = 1970;

/** What is set about the clock, apart from where its cells stand and how they are written. */
export type ClockSettings = Omit<TimeSettings, "column" | "form">;

/** Why a time cell could not be used. */
export type TimeProblem =
  | "unreadable-time"
  | "time-out-of-range"
  | "time-without-offset"
  | "no-such-local-time";

/** What is wrong with the time settings themselves; each is answered by one setting. */
export type TimeSettingsFault =
  | { readonly setting: "form"; readonly why: string }
  | { readonly setting: "zone" | "date" | "start" | "rollover"; readonly why: string };

/** Turns the time cells of one log, row after row, into integer microseconds since 1970-01-01T00:00:00Z. */
export class TimeReader {
  problem: TimeProblem = "unreadable-time";
  /** Cells with digits finer than a microsecond. */
  rounded = 0;
  leapSeconds = 0;
  private readonly settings: ClockSettings;
  private readonly pattern: TimePattern | null = null;
  private readonly count: EpochCount | null = null;
  private readonly serial: SerialDay | null = null;
  private readonly clock: LocalClock | null = null;
  private readonly cell: TimeCell = { local_us: 0, offset_us: null, rounded: false, leapSecond: false };
  /** For cells without a date: the day reached, as local microseconds, and the last time of day. */
  private day_us = 0;
  private timeOfDay_us = Number.NEGATIVE_INFINITY;

  private constructor(form: TimeForm, settings: ClockSettings) {
    this.settings = settings;
    if (settings.zone !== undefined) this.clock = new LocalClock(new ZoneOffsets(settings.zone));
    if (EpochCount.isForm(form)) this.count = new EpochCount(form, settings.start, settings.rollover);
    else if (SerialDay.isForm(form)) this.serial = new SerialDay(form);
    else if (form !== "iso-8601") {
      this.pattern = TimePattern.compile(form, settings.pivot ?? PIVOT) as TimePattern;
      if (!this.pattern.hasDate) this.day_us = dateOf(settings.date!);
    }
  }

  /** A reader, or what the settings lack. */
  static make(form: TimeForm, settings: ClockSettings): TimeReader | TimeSettingsFault {
    if (settings.zone !== undefined) {
      try {
        new ZoneOffsets(settings.zone);
      } catch {
        return { setting: "zone", why: `${settings.zone} is not a time zone that is known here` };
      }
    }
    if (EpochCount.isForm(form)) {
      const fault = EpochCount.fault(form, settings.start, settings.rollover);
      if (fault !== null) return fault;
    } else if (form !== "iso-8601" && !SerialDay.isForm(form)) {
      const pattern = TimePattern.compile(form, settings.pivot ?? PIVOT);
      if (typeof pattern === "string") return { setting: "form", why: pattern };
      if (!pattern.hasDate && Number.isNaN(dateOf(settings.date ?? "")))
        return { setting: "date", why: "the cells hold the time of day without a date" };
    }
    return new TimeReader(form, settings);
  }

  /** Integer microseconds, or NaN with the reason in `problem`. Rows must come in the order of the file. */
  time(text: string): number {
    this.problem = "unreadable-time";
    const time = this.read(text);
    if (Math.abs(time) < EXACT_LIMIT_US) return time;
    if (!Number.isNaN(time)) this.problem = "time-out-of-range";
    return Number.NaN;
  }

  /** What the account should know about how the times were read. */
  remarks(): Record<string, string> {
    const remarks: Record<string, string> = {};
    if (this.pattern?.hasShortYear === true) {
      const pivot = this.settings.pivot ?? PIVOT;
      remarks["two-digit years"] = `${pivot} to ${pivot + 99}`;
    }
    if (this.rounded > 0) remarks["times rounded to the microsecond"] = String(this.rounded);
    if (this.leapSeconds > 0)
      remarks["leap seconds, taken as the midnight that follows"] = String(this.leapSeconds);
    const repeated = this.clock?.repeated;
    if (repeated !== undefined && repeated.first + repeated.second > 0) {
      remarks["rows in a repeated hour, by their order"] =
        `${repeated.first} in the first pass, ${repeated.second} in the second${repeated.unproven > 0 ? `; ${repeated.unproven} of them without a row before that proves it` : ""}`;
    }
    if (this.count !== null && this.count.rollovers > 0)
      remarks["rollovers of the counter"] = String(this.count.rollovers);
    return remarks;
  }

  private read(text: string): number {
    const { cell } = this;
    if (this.count !== null) {
      const time = this.count.time(text);
      if (this.count.rounded) this.rounded++;
      return time;
    }
    if (this.serial !== null) {
      if (!this.serial.read(text, cell)) return Number.NaN;
    } else if (this.pattern === null ? !readIsoTime(text, cell) : !this.pattern.read(text, cell))
      return Number.NaN;
    if (Math.abs(cell.local_us) > EXACT_LIMIT_US + MICROSECONDS_PER_DAY) return cell.local_us;
    if (this.pattern?.hasDate === false) cell.local_us += this.dayOf(cell.local_us);
    let time: number;
    if (cell.offset_us !== null) time = cell.local_us - cell.offset_us;
    else if (this.clock !== null) time = this.clock.utc(cell.local_us);
    else {
      this.problem = "time-without-offset";
      return Number.NaN;
    }
    if (Number.isNaN(time)) this.problem = "no-such-local-time";
    else if (cell.leapSecond) {
      if (time % MICROSECONDS_PER_DAY !== 0) return Number.NaN;
      this.leapSeconds++;
    }
    if (cell.rounded) this.rounded++;
    return time;
  }

  /** Cells without a date: a step back of more than half a day is midnight; a smaller one is a late row. */
  private dayOf(timeOfDay_us: number): number {
    const step = timeOfDay_us - this.timeOfDay_us;
    if (step < -MICROSECONDS_PER_DAY / 2) this.day_us += MICROSECONDS_PER_DAY;
    else if (step > MICROSECONDS_PER_DAY / 2 && Number.isFinite(step))
      return this.day_us - MICROSECONDS_PER_DAY;
    this.timeOfDay_us = timeOfDay_us;
    return this.day_us;
  }
}

function dateOf(text: string): number {
  const cell: TimeCell = { local_us: 0, offset_us: null, rounded: false, leapSecond: false };
  return /^\d{4}-\d\d-\d\d$/.test(text) && readIsoTime(text, cell) ? cell.local_us : Number.NaN;
}
