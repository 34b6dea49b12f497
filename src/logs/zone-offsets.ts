/** Offsets of local clocks from UTC by IANA zone, from the zone data that Node carries (ICU). */

const DAY_US = 86_400e6;
/** No zone has ever stepped by more than a day (Samoa left out 30 December 2011). */
const LARGEST_STEP_US = 26 * 3600e6;

/** A stretch of UTC in which a zone keeps one offset; [from, until) in microseconds. */
export interface OffsetSpan {
  readonly from_us: number;
  readonly until_us: number;
  readonly offset_us: number;
}

export class ZoneOffsets {
  private readonly format: Intl.DateTimeFormat | null;
  private readonly fixed_us: number;
  private readonly byYear = new Map<number, OffsetSpan[]>();
  private last: OffsetSpan = { from_us: 0, until_us: 0, offset_us: 0 };

  /**
   * @param zone  IANA name, or a fixed offset such as +01:00
   * @throws RangeError when the zone is not known
   */
  constructor(zone: string) {
    const match = /^(?:UTC|GMT)?([+-])(\d\d?):?(\d\d)?$/.exec(zone);
    this.fixed_us =
      match === null ? 0 : Number(`${match[1]}1`) * (Number(match[2]) * 60 + Number(match[3] ?? 0)) * 60e6;
    this.format =
      match !== null || zone === "UTC"
        ? null
        : new Intl.DateTimeFormat("en-US-u-ca-gregory-nu-latn", {
            timeZone: zone,
            hourCycle: "h23",
            year: "numeric",
            month: "numeric",
            day: "numeric",
            hour: "numeric",
            minute: "numeric",
            second: "numeric",
          });
  }

  /**
   * The UTC times at which a clock of the zone shows `local_us`: one, two where the clock was put back, none
   * where it was put forward. In ascending order.
   */
  instants(local_us: number): number[] {
    if (this.format === null) return [local_us - this.fixed_us];
    const { last } = this;
    const likely = local_us - last.offset_us;
    if (likely - LARGEST_STEP_US >= last.from_us && likely + LARGEST_STEP_US < last.until_us) return [likely];
    const found: number[] = [];
    for (const span of this.spansAround(local_us)) {
      const utc = local_us - span.offset_us;
      if (utc >= span.from_us && utc < span.until_us) {
        found.push(utc);
        this.last = span;
      }
    }
    return found;
  }

  private spansAround(local_us: number): OffsetSpan[] {
    const year = new Date(local_us / 1000).getUTCFullYear();
    let spans = this.byYear.get(year);
    if (spans === undefined) {
      spans = this.spansOf(year);
      this.byYear.set(year, spans);
    }
    return spans;
  }

  /** Spans over a year and two days on both sides of it. */
  private spansOf(year: number): OffsetSpan[] {
    const start = Date.UTC(year, 0, 1) * 1000 - 2 * DAY_US;
    const end = Date.UTC(year + 1, 0, 1) * 1000 + 2 * DAY_US;
    const spans: OffsetSpan[] = [];
    let from_us = start;
    let offset_us = this.offsetAt(start);
    for (let day = start; day < end; day += DAY_US) {
      const after = this.offsetAt(day + DAY_US);
      if (after === offset_us) continue;
      const step = this.stepBetween(Math.max(day, from_us), day + DAY_US, offset_us);
      spans.push({ from_us, until_us: step, offset_us });
      from_us = step;
      offset_us = this.offsetAt(step);
      if (offset_us !== after) day -= DAY_US;
    }
    spans.push({ from_us, until_us: end, offset_us });
    return spans;
  }

  /** First second after `before` at which the offset is no longer `offset_us`. */
  private stepBetween(before: number, after: number, offset_us: number): number {
    let low = before;
    let high = after;
    while (high - low > 1e6) {
      const middle = Math.floor((low + high) / 2e6) * 1e6;
      if (this.offsetAt(middle) === offset_us) low = middle;
      else high = middle;
    }
    return high;
  }

  private offsetAt(utc_us: number): number {
    const parts: Record<string, number> = {};
    for (const { type, value } of this.format!.formatToParts(utc_us / 1000)) parts[type] = Number(value);
    const local = Date.UTC(
      parts["year"]!,
      parts["month"]! - 1,
      parts["day"]!,
      parts["hour"]!,
      parts["minute"]!,
      parts["second"]!,
    );
    return local * 1000 - Math.floor(utc_us / 1e6) * 1e6;
  }
}
