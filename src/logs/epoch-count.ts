import { readIsoTime, type TimeCell } from "./iso-time.ts";
import type { TimeSettingsFault } from "./time-reader.ts";
import { readUnixTime } from "./unix-time.ts";

/** Decimal places between the unit of a count and a microsecond. */
const SHIFTS: Record<string, number> = { s: 6, ms: 3, us: 0, ns: -3 };

/**
 * Counts of seconds, milliseconds, microseconds or nanoseconds: `unix-…` since 1970-01-01T00:00:00Z,
 * `elapsed-…` since a stated start. A counter that starts again at a stated value is followed from row to row.
 */
export class EpochCount {
  rollovers = 0;
  rounded = false;
  private readonly shift: number;
  private readonly start_us: number;
  /** Nanoseconds after which the count starts again; null when it does not. */
  private readonly modulus_ns: bigint | null;
  private turns = 0;
  private previous_us = Number.NaN;
  private readonly onRounded = (): void => {
    this.rounded = true;
  };

  constructor(form: string, start: string | undefined, rollover: number | undefined) {
    this.shift = shiftOf(form)!;
    this.start_us = form.startsWith("elapsed-") ? instantOf(start!) : 0;
    this.modulus_ns = rollover === undefined ? null : BigInt(rollover) * 10n ** BigInt(this.shift + 3);
  }

  static isForm(form: string): boolean {
    return shiftOf(form) !== null;
  }

  static fault(
    form: string,
    start: string | undefined,
    rollover: number | undefined,
  ): TimeSettingsFault | null {
    if (form.startsWith("elapsed-") && Number.isNaN(instantOf(start ?? "")))
      return { setting: "start", why: "a count of elapsed time needs the time at which it was zero" };
    if (rollover !== undefined && !(Number.isSafeInteger(rollover) && rollover > 0))
      return { setting: "rollover", why: "a counter starts again at a whole number greater than zero" };
    return null;
  }

  /** Integer microseconds, NaN when the cell is not a count. */
  time(text: string): number {
    this.rounded = false;
    const count = readUnixTime(text, this.shift, this.onRounded);
    if (Number.isNaN(count)) return count;
    return this.start_us + (this.modulus_ns === null ? count : this.unrolled(count, this.modulus_ns));
  }

  /** The turn that brings the count nearest to the row before. */
  private unrolled(count: number, modulus_ns: bigint): number {
    const half = Number(modulus_ns) / 2000;
    const at = (turns: number): number => count + Number((BigInt(turns) * modulus_ns + 500n) / 1000n);
    let time = at(this.turns);
    if (time < this.previous_us - half) {
      this.turns++;
      this.rollovers++;
      time = at(this.turns);
    } else if (time > this.previous_us + half && this.turns > 0) return at(this.turns - 1);
    this.previous_us = time;
    return time;
  }
}

function shiftOf(form: string): number | null {
  const match = /^(?:unix|elapsed)-(s|ms|us|ns)$/.exec(form);
  return match === null ? null : SHIFTS[match[1]!]!;
}

function instantOf(text: string): number {
  const cell: TimeCell = { local_us: 0, offset_us: null, rounded: false, leapSecond: false };
  return readIsoTime(text, cell) && cell.offset_us !== null ? cell.local_us - cell.offset_us : Number.NaN;
}
