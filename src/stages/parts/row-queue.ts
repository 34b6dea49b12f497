import type { MarkedRows } from "../../signal/marked-rows.ts";

/** Rows that wait for a decision: added at the end, taken from the front; grows with what has to wait. */
export class RowQueue {
  /** Number of the row in front, counted over the whole series. */
  base = 0;
  length = 0;
  times = new Float64Array(0);
  /** By channel. */
  columns: Float64Array[];
  marks: Uint8Array[];
  /** Why a value is rejected, by number; 0: it is not. */
  reasons: Uint8Array[];
  /** Number of the row that stands first in the arrays; rows before `base` have been taken. */
  origin = 0;
  private room = 0;

  constructor(channels: number) {
    this.columns = Array.from({ length: channels }, () => new Float64Array(0));
    this.marks = this.columns.map(() => new Uint8Array(0));
    this.reasons = this.columns.map(() => new Uint8Array(0));
  }

  /** Number of the row after the last. */
  get end(): number {
    return this.base + this.length;
  }

  append({ count, times, columns, marks }: MarkedRows): void {
    if (this.end - this.origin + count > this.room) this.makeRoom(count);
    const at = this.end - this.origin;
    this.times.set(times.subarray(0, count), at);
    columns.forEach((column, c) => {
      this.columns[c]!.set(column.subarray(0, count), at);
      this.marks[c]!.set(marks[c]!.subarray(0, count), at);
      this.reasons[c]!.fill(0, at, at + count);
    });
    this.length += count;
  }

  /** Takes rows from the front, as a block of their own, each channel finished by `finish`. */
  take(
    count: number,
    finish: (
      channel: number,
      reasons: Uint8Array,
      times: Float64Array,
      values: Float64Array,
      marks: Uint8Array,
    ) => void,
  ): MarkedRows {
    const from = this.base - this.origin;
    const times = this.times.slice(from, from + count);
    const columns = this.columns.map((column) => column.slice(from, from + count));
    const marks = this.marks.map((mark) => mark.slice(from, from + count));
    columns.forEach((column, c) =>
      finish(c, this.reasons[c]!.subarray(from, from + count), times, column, marks[c]!),
    );
    this.base += count;
    this.length -= count;
    return { count, times, columns, marks };
  }

  /** Moves the rows that wait to the front, into larger arrays where they fill more than half. */
  private makeRoom(count: number): void {
    const from = this.base - this.origin;
    const to = from + this.length;
    if (2 * (this.length + count) > this.room) this.room = Math.max(2 * (this.length + count), 64);
    const room = this.room;
    const floats = (a: Float64Array) => {
      const b = new Float64Array(room);
      b.set(a.subarray(from, to));
      return b;
    };
    const bytes = (a: Uint8Array) => {
      const b = new Uint8Array(room);
      b.set(a.subarray(from, to));
      return b;
    };
    this.times = floats(this.times);
    this.columns = this.columns.map(floats);
    this.marks = this.marks.map(bytes);
    this.reasons = this.reasons.map(bytes);
    this.origin = this.base;
  }
}
