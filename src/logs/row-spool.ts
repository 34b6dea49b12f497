import { closeSync, mkdtempSync, openSync, readSync, rmSync, writeSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import type { RowBlock } from "./rows.ts";

/** Rows held in memory before the spool goes to a temporary file: about 8 MB for three channels. */
const ROWS_IN_MEMORY = 262_144;
const ROWS_IN_BLOCK = 8_192;

/**
 * The decoded rows of one series, kept once as binary columns so that the text is parsed only once however
 * many passes the chain needs. Small records stay in memory; larger ones go to a temporary file, so memory
 * does not grow with the record. Each block holds up to 8,192 rows: times, then one column a channel.
 */
export class RowSpool {
  rows = 0;
  /** Integer microseconds; meaningless while rows is 0. */
  first_us = 0;
  last_us = 0;
  private readonly channels: number;
  private readonly blockRows: number;
  private readonly filled: { count: number; data: Float64Array | null; at: number }[] = [];
  private current: Float64Array;
  private count = 0;
  private folder: string | null = null;
  private handle: number | null = null;
  private written = 0;

  constructor(channels: number, blockRows = ROWS_IN_BLOCK) {
    this.channels = channels;
    this.blockRows = blockRows;
    this.current = this.emptyBlock();
  }

  append(block: RowBlock): void {
    if (block.count === 0) return;
    if (this.rows === 0) this.first_us = block.times[0]!;
    this.last_us = block.times[block.count - 1]!;
    for (let from = 0; from < block.count; ) {
      const n = Math.min(block.count - from, this.blockRows - this.count);
      this.current.set(block.times.subarray(from, from + n), this.count);
      for (let c = 0; c < this.channels; c++)
        this.current.set(block.columns[c]!.subarray(from, from + n), (c + 1) * this.blockRows + this.count);
      this.count += n;
      from += n;
      if (this.count === this.blockRows) this.store();
    }
    this.rows += block.count;
  }

  /** Reads the rows from the start, block by block; may be called as often as passes are needed. */
  *blocks(): Generator<RowBlock> {
    const scratch = this.handle === null ? null : this.emptyBlock();
    for (const { count, data, at } of this.filled) yield this.asRows(data ?? this.load(scratch!, at), count);
    if (this.count > 0) yield this.asRows(this.current, this.count);
  }

  /** Removes the temporary file; the spool is of no use afterwards. */
  close(): void {
    if (this.handle !== null) closeSync(this.handle);
    if (this.folder !== null) rmSync(this.folder, { recursive: true, force: true });
    this.handle = null;
    this.folder = null;
  }

  private emptyBlock(): Float64Array {
    return new Float64Array((this.channels + 1) * this.blockRows);
  }

  private asRows(data: Float64Array, count: number): RowBlock {
    const columns = Array.from({ length: this.channels }, (_, c) =>
      data.subarray((c + 1) * this.blockRows, (c + 1) * this.blockRows + count),
    );
    return { count, times: data.subarray(0, count), columns };
  }

  private store(): void {
    if (this.filled.length * this.blockRows < ROWS_IN_MEMORY) {
      this.filled.push({ count: this.count, data: this.current, at: 0 });
      this.current = this.emptyBlock();
    } else {
      if (this.handle === null) {
        this.folder = mkdtempSync(join(tmpdir(), "forebay-"));
        this.handle = openSync(join(this.folder, "rows"), "w+", 0o600);
      }
      const bytes = new Uint8Array(this.current.buffer);
      for (let done = 0; done < bytes.length; )
        done += writeSync(this.handle, bytes, done, bytes.length - done, this.written + done);
      this.filled.push({ count: this.count, data: null, at: this.written });
      this.written += bytes.length;
    }
    this.count = 0;
  }

  private load(scratch: Float64Array, at: number): Float64Array {
    const bytes = new Uint8Array(scratch.buffer);
    for (let done = 0; done < bytes.length; ) {
      const n = readSync(this.handle!, bytes, done, bytes.length - done, at + done);
      if (n === 0) throw new Error("temporary row file is shorter than what was written to it");
      done += n;
    }
    return scratch;
  }
}
