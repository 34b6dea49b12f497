import { isUtf8 } from "node:buffer";
import type { Diagnostic } from "../diagnostics.ts";
import { type ByteSource, Digest, digestOf, unpacked } from "./byte-source.ts";
import { type Cells, cellsOf } from "./cells.ts";
import { lastCellIsWhole } from "./cut-line.ts";
import { messageOf } from "./head.ts";
import { cellCountHolds } from "./layout.ts";
import { logProblems } from "./log-problems.ts";
import type { ProbedLog } from "./probe.ts";
import { type RecordBatch, RecordSplitter } from "./record-splitter.ts";
import { ReorderBuffer, type SortedRows } from "./reorder-buffer.ts";
import { newRowAccount, noteLine, setAside } from "./row-account.ts";
import { RowReader, type Tally } from "./row-reader.ts";
import type { FileAccount, ReadRequest, RowAccount } from "./rows.ts";
import { repairUtf8, Utf8Stream } from "./text-decoding.ts";

/** Rows before a last line without line end that are compared with it. */
const LAST_ROWS_KEPT = 20;
/** Share of rows set aside from which on a log deserves a word. */
const MANY_ASIDE = 0.5;

/** Reads the rows of one log in order of time, and keeps the account of what became of each. */
export class LogRows {
  readonly rows: RowAccount;
  private readonly log: ProbedLog;
  private readonly request: ReadRequest;
  private readonly source: ByteSource;
  private readonly buffer: ReorderBuffer;
  private readonly reader: RowReader;
  private readonly splitter: RecordSplitter;
  private readonly notUtf8: Tally = { count: 0, firstLines: [] };
  private lastCells: Cells[] = [];
  private damage: Diagnostic | null = null;
  private bytes = 0;
  private sha256 = "";

  constructor(log: ProbedLog, request: ReadRequest, source: ByteSource) {
    this.log = log;
    this.request = request;
    this.source = source;
    this.rows = newRowAccount(request.channels.length);
    this.buffer = new ReorderBuffer(request.channels.length, request.lateBy_us, this.rows);
    this.reader = new RowReader(log, request, this.rows, this.buffer);
    this.splitter = new RecordSplitter({
      separator: log.separator,
      // Where the time stands first, no row can begin with #; elsewhere a cell such as #### may.
      comments: log.columns.timeIndexes[0] === 0,
      fromLine: log.dataFromLine,
      onRefused: (line, reason) => {
        this.rows.read++;
        setAside(this.rows, reason, line);
      },
      onComment: (line) => noteLine(this.reader.comments, line),
    });
  }

  async *sorted(): AsyncGenerator<SortedRows> {
    const { log, splitter } = this;
    const digest = new Digest();
    const decoder = new Utf8Stream(log.encoding.label);
    const chunks = unpacked(digest.tap(this.source(log.file)));
    try {
      for (let chunk = await this.next(chunks); chunk !== null; chunk = await this.next(chunks)) {
        const batch = splitter.push(decoder.push(chunk));
        if (batch === null) continue;
        this.take(batch);
        const rows = this.buffer.drain(false);
        if (rows !== null) yield rows;
      }
    } finally {
      await chunks.return(undefined);
    }
    if (this.damage === null) {
      this.bytes = digest.bytes;
      this.sha256 = digest.sha256();
    } else await this.digestAgain();
    // A batch is valid only until the splitter is asked again.
    const more = splitter.push(decoder.end());
    if (more !== null) this.take(more);
    const last = splitter.end();
    if (last !== null) this.take(last);
    this.reader.end();
    const rows = this.buffer.drain(true);
    if (rows !== null) yield rows;
  }

  /** Complete once all rows have been read. */
  account(): FileAccount {
    const { log, rows, notUtf8, reader, splitter } = this;
    const { lf, crlf, cr } = splitter.lineEnds;
    const kinds = [lf > 0 && "LF", crlf > 0 && "CR LF", cr > 0 && "CR"].filter((kind) => kind !== false);
    const found: Record<string, string> = { ...log.found };
    found["line ends"] = kinds.length > 1 ? `mixed: ${kinds.join(", ")}` : (kinds[0] ?? "none");
    if (splitter.blankLines > 0) found["blank lines"] = String(splitter.blankLines);
    const tallies: [string, Tally, string][] = [
      ["comment lines", reader.comments, ""],
      ["lines that are not valid UTF-8", notUtf8, "; read as Windows-1252 (Latin-1)"],
      ["backward steps of the clock", reader.backwardSteps, ""],
      ["names that changed on the way", reader.newNames, "; the columns were found again by name"],
    ];
    for (const [words, tally, rest] of tallies) if (tally.count > 0) found[words] = inWords(tally) + rest;
    if (log.clockSetLine > 0)
      found["clock set"] = `at line ${log.clockSetLine}; the rows above it count from a lost date`;
    Object.assign(found, reader.times.remarks());
    return { file: log.file.name, bytes: this.bytes, sha256: this.sha256, rows, found };
  }

  /** What is to be said about the log once all its rows have been read. */
  diagnostics(): Diagnostic[] {
    const { log, rows, request } = this;
    const { name } = log.file;
    const said: Diagnostic[] = this.damage === null ? [] : [this.damage];
    this.reader.suspects.forEach((codes, c) => {
      for (const { value, count, firstLines } of codes.suspects())
        said.push(logProblems.suspectCode(name, request.channels[c]!.column, value, count, firstLines[0]!));
    });
    if (rows.used + rows.merged > 0) {
      const aside = rows.read - rows.used - rows.merged;
      if (aside > MANY_ASIDE * rows.read)
        said.push(logProblems.manySetAside(name, rows.read, reasonsOf(rows), firstAside(rows)));
    } else if (this.damage === null) {
      const problem =
        rows.read === 0
          ? logProblems.noRows(name, log.namesLine)
          : logProblems.noUsableRows(name, reasonsOf(rows), firstAside(rows));
      said.push(problem.diagnostic);
    }
    return said;
  }

  /** The next bytes; null at the end, and where the log breaks off. */
  private async next(chunks: AsyncIterator<Uint8Array>): Promise<Uint8Array | null> {
    try {
      const next = await chunks.next();
      return next.done === true ? null : next.value;
    } catch (error) {
      this.damage = logProblems.damaged(this.log.file.name, messageOf(error), this.rows.read).diagnostic;
      return null;
    }
  }

  private async digestAgain(): Promise<void> {
    try {
      const digest = await digestOf(this.source(this.log.file));
      this.bytes = digest.bytes;
      this.sha256 = digest.sha256;
    } catch {
      // A file that cannot be read to its end has no digest; the diagnostic says so.
    }
  }

  private take(batch: RecordBatch): void {
    const readable = isUtf8(batch.bytes) ? batch : this.repaired(batch);
    const records = cellsOf(readable, this.log.separator);
    const last = records.length - 1;
    for (let i = 0; i <= last; i++) {
      const cut = batch.cut && i === last && !this.endIsWhole(batch, records);
      this.reader.row(records[i]!, batch.lines[i]!, cut);
    }
    this.lastCells = records.slice(-LAST_ROWS_KEPT);
  }

  private endIsWhole(batch: RecordBatch, records: readonly Cells[]): boolean {
    const columns = this.reader.columnsInForce;
    const cells = records.at(-1)!;
    if (cells === null || columns === null || !cellCountHolds(cells, columns)) return false;
    const quoteCloses = batch.bytes.at(-1) === 34;
    const before = [...this.lastCells, ...records.slice(0, -1)].slice(-LAST_ROWS_KEPT);
    return lastCellIsWhole(cells, quoteCloses, before, columns);
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
}

function inWords({ count, firstLines }: Tally): string {
  const word = count === 1 ? "line" : firstLines.length < count ? "first lines" : "lines";
  return `${count} (${word} ${firstLines.join(", ")})`;
}

function reasonsOf(rows: RowAccount): string {
  return [...rows.setAside.entries()].map(([reason, { count }]) => `${count} ${reason}`).join(", ");
}

function firstAside(rows: RowAccount): number {
  return Math.min(...[...rows.setAside.values()].flatMap((tally) => tally.firstLines));
}
