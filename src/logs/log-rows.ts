import { isUtf8 } from "node:buffer";
import { type ByteSource, Digest, digestOf, unpacked } from "./byte-source.ts";
import { type Cells, cellsOf } from "./cells.ts";
import { lastCellIsWhole } from "./cut-line.ts";
import { type LogProblem, logProblems } from "./log-problems.ts";
import { MissingCodes } from "./missing-codes.ts";
import { readNumber } from "./number-cell.ts";
import { messageOf, type ProbedLog } from "./probe.ts";
import { type RecordBatch, RecordSplitter } from "./record-splitter.ts";
import { ReorderBuffer, type SortedRows } from "./reorder-buffer.ts";
import { newRowAccount, noteLine, setAside } from "./row-account.ts";
import type { FileAccount, ReadRequest, RowAccount } from "./rows.ts";
import { repairUtf8, Utf8Stream } from "./text-decoding.ts";
import { TimeReader } from "./time-reader.ts";

/** Reads the rows of one log in order of time, and keeps the account of what became of each. */
export class LogRows {
  readonly rows: RowAccount;
  /** Set when the log breaks off before its end. */
  problem: LogProblem | null = null;
  private readonly log: ProbedLog;
  private readonly source: ByteSource;
  private readonly times: TimeReader;
  private readonly missing: MissingCodes;
  private readonly buffer: ReorderBuffer;
  private readonly values: Float64Array;
  private readonly comments = { count: 0, firstLines: [] as number[] };
  private readonly notUtf8 = { count: 0, firstLines: [] as number[] };
  private readonly steps = { count: 0, firstLines: [] as number[] };
  private previous_us = Number.NEGATIVE_INFINITY;
  private previousCells: Cells[] = [];
  private splitter: RecordSplitter;
  private bytes = 0;
  private sha256 = "";

  constructor(log: ProbedLog, request: ReadRequest, source: ByteSource) {
    this.log = log;
    this.source = source;
    this.rows = newRowAccount(request.channels.length);
    this.times = new TimeReader(request.time.form, request.time.zone);
    this.missing = new MissingCodes(request.missing);
    this.buffer = new ReorderBuffer(request.channels.length, request.lateBy_us, this.rows);
    this.values = new Float64Array(request.channels.length);
    this.splitter = new RecordSplitter({
      separator: log.layout.separator,
      // Where the time stands first, no row can begin with #; elsewhere a cell such as #### may.
      comments: log.layout.timeIndex === 0,
      fromLine: log.layout.dataFromLine,
      onRefused: (line, reason) => {
        this.rows.read++;
        setAside(this.rows, reason, line);
      },
      onComment: (line) => noteLine(this.comments, line),
    });
  }

  async *sorted(): AsyncGenerator<SortedRows> {
    const { log, splitter } = this;
    const digest = new Digest();
    const decoder = new Utf8Stream(log.encoding.label);
    try {
      for await (const chunk of unpacked(digest.tap(this.source(log.file)))) {
        const batch = splitter.push(decoder.push(chunk));
        if (batch === null) continue;
        this.take(batch);
        const rows = this.buffer.drain(false);
        if (rows !== null) yield rows;
      }
      this.bytes = digest.bytes;
      this.sha256 = digest.sha256();
    } catch (error) {
      this.problem = logProblems.damaged(log.file.name, messageOf(error), this.rows.read);
      await this.digestAgain();
    }
    // A batch is valid only until the splitter is asked again.
    const more = splitter.push(decoder.end());
    if (more !== null) this.take(more);
    const last = splitter.end();
    if (last !== null) this.take(last);
    const rows = this.buffer.drain(true);
    if (rows !== null) yield rows;
  }

  get namesLine(): number {
    return this.log.layout.namesLine;
  }

  /** Complete once all rows have been read. */
  account(): FileAccount {
    const { log, rows, comments, notUtf8, steps, times } = this;
    const { lf, crlf, cr } = this.splitter.lineEnds;
    const kinds = [lf > 0 && "LF", crlf > 0 && "CR LF", cr > 0 && "CR"].filter((kind) => kind !== false);
    const found: Record<string, string> = { ...log.found };
    found["line ends"] = kinds.length > 1 ? `mixed: ${kinds.join(", ")}` : (kinds[0] ?? "none");
    if (comments.count > 0) found["comment lines"] = tallied(comments);
    if (this.splitter.blankLines > 0) found["blank lines"] = String(this.splitter.blankLines);
    if (notUtf8.count > 0)
      found["lines that are not valid UTF-8"] = `${tallied(notUtf8)}; read as Windows-1252 (Latin-1)`;
    if (steps.count > 0) found["backward steps of the clock"] = tallied(steps);
    if (times.rounded > 0) found["times rounded to the microsecond"] = String(times.rounded);
    if (times.leapSeconds > 0)
      found["leap seconds, taken as the midnight that follows"] = String(times.leapSeconds);
    return { file: log.file.name, bytes: this.bytes, sha256: this.sha256, rows, found };
  }

  private async digestAgain(): Promise<void> {
    try {
      const digest = await digestOf(this.source(this.log.file));
      this.bytes = digest.bytes;
      this.sha256 = digest.sha256;
    } catch {
      // A file that cannot be read to its end has no digest; the problem says so.
    }
  }

  private take(batch: RecordBatch): void {
    const readable = isUtf8(batch.bytes) ? batch : this.repaired(batch);
    const records = cellsOf(readable, this.log.layout.separator);
    const last = records.length - 1;
    for (let i = 0; i <= last; i++) {
      const cells = records[i]!;
      const line = batch.lines[i]!;
      const cut = batch.cut && i === last && !this.endIsWhole(batch, cells, records.slice(0, last));
      this.row(cells, line, cut);
    }
    this.previousCells = records.slice(-LAST_ROWS_KEPT);
  }

  private endIsWhole(batch: RecordBatch, cells: Cells, before: readonly Cells[]): boolean {
    const { layout } = this.log;
    const quoteCloses = batch.bytes.at(-1) === 34;
    const rows = [...this.previousCells, ...before].slice(-LAST_ROWS_KEPT);
    return cells !== null && this.cellCountHolds(cells) && lastCellIsWhole(cells, quoteCloses, rows, layout);
  }

  /** Lines that are not UTF-8 are read as Windows-1252, each for itself. */
  private repaired(batch: RecordBatch): RecordBatch {
    const parts: Uint8Array[] = [];
    const ends: number[] = [];
    let length = 0;
    batch.ends.forEach((end, i) => {
      const bytes = batch.bytes.subarray(i === 0 ? 0 : batch.ends[i - 1]!, end);
      const part = repairUtf8(bytes);
      if (part !== bytes) noteLine(this.notUtf8, batch.lines[i]!);
      parts.push(part);
      length += part.length;
      ends.push(length);
    });
    return { bytes: Buffer.concat(parts, length), lines: batch.lines, ends, cut: batch.cut };
  }

  private cellCountHolds(cells: readonly string[]): boolean {
    const { names, namesCells } = this.log.layout;
    if (cells.length === namesCells) return true;
    if (cells.length < names.length) return false;
    for (let i = names.length; i < cells.length; i++) if (cells[i] !== "") return false;
    return true;
  }

  private row(cells: Cells, line: number, cut: boolean): void {
    const { rows, log } = this;
    const { layout } = log;
    if (cells?.[0]?.startsWith("#") && Number.isNaN(this.times.time(cells[layout.timeIndex] ?? ""))) {
      noteLine(this.comments, line);
      return;
    }
    rows.read++;
    if (cut) setAside(rows, "cut-short", line);
    else if (cells === null) setAside(rows, "unreadable-quotes", line);
    else if (!this.cellCountHolds(cells)) setAside(rows, "ragged", line);
    else {
      const time = this.times.time(cells[layout.timeIndex]!);
      if (Number.isNaN(time)) {
        const again = cells[layout.timeIndex] === layout.names[layout.timeIndex];
        setAside(rows, again ? "repeated-names" : this.times.problem, line);
      } else this.reading(time, cells, line);
    }
  }

  private reading(time: number, cells: readonly string[], line: number): void {
    const { rows, values, missing } = this;
    const { channelIndexes, decimalSign } = this.log.layout;
    let unreadable = false;
    let kept = false;
    for (let c = 0; c < channelIndexes.length; c++) {
      const cell = cells[channelIndexes[c]!]!;
      const value = cell === "" ? Number.NaN : readNumber(cell, decimalSign);
      if (Number.isNaN(value) ? missing.isWord(cell) : missing.isNumber(value)) {
        rows.missingCells[c]!++;
        values[c] = Number.NaN;
      } else if (Number.isNaN(value)) {
        noteLine(rows.unreadableCells[c]!, line);
        values[c] = value;
        unreadable = true;
      } else {
        values[c] = value;
        kept = true;
      }
    }
    if (time < this.previous_us) noteLine(this.steps, line);
    this.previous_us = time;
    if (unreadable && !kept) setAside(rows, "no-readable-value", line);
    else this.buffer.add(time, line, values);
  }
}

/** Rows before a last line without line end that are compared with it. */
const LAST_ROWS_KEPT = 20;

function tallied({ count, firstLines }: { count: number; readonly firstLines: readonly number[] }): string {
  const word = count === 1 ? "line" : firstLines.length < count ? "first lines" : "lines";
  return `${count} (${word} ${firstLines.join(", ")})`;
}
