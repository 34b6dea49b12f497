import type { TimeCell } from "./iso-time.ts";

/** Days from 1970-01-01 back to day 0 of the two date systems of spreadsheets (ISO/IEC 29500-1, 18.17.4.1). */
const DAY_ZERO: Record<string, number> = { "serial-day-1900": -25_569, "serial-day-1904": -24_107 };

/**
 * Days since a spreadsheet's day 0, with the time as a decimal part. In the 1900 system only days from
 * 1 March 1900 on (61) are read: before that day spreadsheets count a 29 February that never was.
 */
export class SerialDay {
  private readonly form: string;

  constructor(form: string) {
    this.form = form;
  }

  static isForm(form: string): boolean {
    return form in DAY_ZERO;
  }

  read(text: string, into: TimeCell): boolean {
    const match = /^(\d{1,7})(?:[.,](\d{1,18}))?$/.exec(text);
    if (match === null) return false;
    const day = Number(match[1]);
    if (this.form === "serial-day-1900" && day < 61) return false;
    const decimals = match[2] ?? "";
    const scale = 10n ** BigInt(decimals.length);
    const part = BigInt(decimals === "" ? "0" : decimals) * 86_400_000_000n;
    const rest = part % scale;
    into.offset_us = null;
    into.leapSecond = false;
    into.rounded = rest !== 0n;
    into.local_us =
      (DAY_ZERO[this.form]! + day) * 86_400e6 + Number(part / scale) + (rest * 2n >= scale ? 1 : 0);
    return true;
  }
}
