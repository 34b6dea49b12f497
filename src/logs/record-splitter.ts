/** Cuts the bytes of a log into records (rows with their line ends) and knows the physical line of each. */

/** A row longer than this is not a row of readings; it is skipped without being held. */
const LONGEST_RECORD = 1 << 20;
/** A quoted cell that runs on further than this was never closed. */
const LONGEST_QUOTE = 1 << 16;
/** Records are handed on when this much text is together, however small the pieces it came in. */
const BATCH_BYTES = 1 << 16;

const LF = 10;
const CR = 13;
const BLANK = 32;
const TAB = 9;
const QUOTE = 34;
const HASH = 35;

/** Whole records, each with its line end; the last one of a log may lack it. */
export interface RecordBatch {
  readonly bytes: Buffer;
  /** Physical 1-based line on which each record begins. */
  readonly lines: readonly number[];
  /** Offset in `bytes` at which each record ends. */
  readonly ends: readonly number[];
  /** The last record has no line end: the log may have been cut there. */
  readonly cut: boolean;
}

export type Refusal = "nul-bytes" | "line-too-long" | "unclosed-quote";

export interface SplitOptions {
  readonly separator: string;
  /** Lines that begin with `#` are comments. */
  readonly comments: boolean;
  /** Physical line of the first data row; what stands above is dropped. */
  readonly fromLine: number;
  readonly onRefused: (line: number, reason: Refusal) => void;
  readonly onComment: (line: number) => void;
}

/** What stood between rows, for the account. */
export interface LineEndCounts {
  lf: number;
  crlf: number;
  cr: number;
}

/**
 * A quote opens a cell only at the cell's start (RFC 4180), so stray inch signs do not swallow rows. A lone CR
 * ends a line as LF and CR LF do. Memory is bounded: over-long rows are skipped, and a quote that never closes
 * costs only the line on which it was opened. Nothing depends on how the bytes were cut into pieces.
 */
export class RecordSplitter {
  readonly lineEnds: LineEndCounts = { lf: 0, crlf: 0, cr: 0 };
  blankLines = 0;
  private readonly options: SplitOptions;
  private readonly separator: number;
  /** Taken only while the log is being read: a series may have thousands of logs. */
  private buffer: Buffer = Buffer.alloc(0);
  private length = 0;
  private position = 0;
  /** End of the accepted records, which lie packed at the start of the buffer. */
  private kept = 0;
  private lines: number[] = [];
  private ends: number[] = [];
  private line = 1;
  private recordStart = 0;
  private recordLine = 1;
  /** Where the record's second physical line begins; -1 while it has only one. */
  private secondLine = -1;
  private quoted = false;
  private cellStart = true;
  private empty = true;
  private comment = false;
  private nul = false;
  private skipping = false;

  constructor(options: SplitOptions) {
    this.options = options;
    this.separator = options.separator.charCodeAt(0);
  }

  /** Takes more bytes; gives a batch when enough is together. The batch is valid until the next call. */
  push(chunk: Uint8Array): RecordBatch | null {
    this.append(chunk);
    this.scan(false);
    return this.kept >= BATCH_BYTES ? this.take(false) : null;
  }

  /** No more bytes come. */
  end(): RecordBatch | null {
    this.scan(true);
    while (this.quoted && this.giveUpQuote()) this.scan(true);
    if (this.quoted) {
      this.options.onRefused(this.recordLine, "unclosed-quote");
      this.beginRecord(this.length);
    }
    const before = this.lines.length;
    if (this.recordStart < this.length || this.skipping) this.closeRecord(this.length);
    const batch = this.lines.length > 0 ? this.take(this.lines.length > before) : null;
    this.buffer = Buffer.alloc(0);
    this.length = 0;
    this.position = 0;
    this.recordStart = 0;
    return batch;
  }

  private take(cut: boolean): RecordBatch {
    const batch = { bytes: this.buffer.subarray(0, this.kept), lines: this.lines, ends: this.ends, cut };
    this.lines = [];
    this.ends = [];
    this.kept = 0;
    return batch;
  }

  private append(chunk: Uint8Array): void {
    const gap = this.recordStart - this.kept;
    if (gap > 0) {
      this.buffer.copyWithin(this.kept, this.recordStart, this.length);
      this.length -= gap;
      this.position -= gap;
      this.recordStart -= gap;
      if (this.secondLine >= 0) this.secondLine -= gap;
    }
    const needed = this.length + chunk.length;
    if (needed > this.buffer.length) {
      const larger = Buffer.allocUnsafe(Math.max(needed, 2 * this.buffer.length, 2 * BATCH_BYTES));
      this.buffer.copy(larger, 0, 0, this.length);
      this.buffer = larger;
    }
    this.buffer.set(chunk, this.length);
    this.length = needed;
  }

  private scan(final: boolean): void {
    const { separator } = this;
    while (this.position < this.length) {
      const { buffer, length } = this;
      let at = this.position;
      let byte = buffer[at]!;
      while (byte > HASH && byte !== separator && ++at < length) byte = buffer[at]!;
      if (at > this.position) {
        this.cellStart = false;
        this.empty = false;
        this.position = at;
      } else if (byte === LF || byte === CR) {
        if (byte === CR && this.position + 1 === this.length && !final) return;
        this.lineBreak(byte);
      } else if (byte === separator) {
        this.cellStart = true;
        this.empty = false;
        this.position++;
      } else if (byte === QUOTE) {
        if (this.quoted && this.position + 1 === this.length && !final) return;
        this.quote();
      } else {
        if (byte === HASH && this.empty && this.options.comments) this.comment = true;
        if (byte === 0) this.nul = true;
        if (byte !== BLANK && byte !== TAB) {
          this.cellStart = false;
          this.empty = false;
        }
        this.position++;
      }
      const held = this.position - this.recordStart;
      if (held > LONGEST_QUOTE) this.tooLong(held);
    }
  }

  private quote(): void {
    this.empty = false;
    if (this.quoted) {
      if (this.buffer[this.position + 1] === QUOTE && this.position + 1 < this.length) this.position++;
      else this.quoted = false;
      this.cellStart = false;
    } else if (
      this.cellStart &&
      !this.comment &&
      !this.skipping &&
      this.recordLine >= this.options.fromLine
    ) {
      this.quoted = true;
    }
    this.cellStart = false;
    this.position++;
  }

  private lineBreak(byte: number): void {
    const pair = byte === CR && this.position + 1 < this.length && this.buffer[this.position + 1] === LF;
    if (pair) this.lineEnds.crlf++;
    else if (byte === CR) this.lineEnds.cr++;
    else this.lineEnds.lf++;
    this.position += pair ? 2 : 1;
    this.line++;
    if (!this.quoted) this.closeRecord(this.position);
    else if (this.secondLine < 0) this.secondLine = this.position;
  }

  /** The record that is being scanned ends before `end`. */
  private closeRecord(end: number): void {
    const { recordLine, options } = this;
    if (recordLine >= options.fromLine) {
      if (this.skipping) options.onRefused(recordLine, this.nul ? "nul-bytes" : "line-too-long");
      else if (this.comment) options.onComment(recordLine);
      else if (this.nul) options.onRefused(recordLine, "nul-bytes");
      else if (this.empty) this.blankLines++;
      else {
        if (this.recordStart !== this.kept) this.buffer.copyWithin(this.kept, this.recordStart, end);
        this.kept += end - this.recordStart;
        this.lines.push(recordLine);
        this.ends.push(this.kept);
      }
    } else if (this.comment) options.onComment(recordLine);
    this.beginRecord(end);
  }

  private beginRecord(at: number): void {
    this.recordStart = at;
    this.recordLine = this.line;
    this.secondLine = -1;
    this.quoted = false;
    this.cellStart = true;
    this.empty = true;
    this.comment = false;
    this.nul = false;
    this.skipping = false;
  }

  private tooLong(held: number): void {
    if (this.quoted && this.giveUpQuote()) return;
    if (held <= LONGEST_RECORD) return;
    // The bytes so far are let go; only the end of the line is still looked for.
    this.skipping = true;
    this.quoted = false;
    this.buffer.copyWithin(this.recordStart, this.position, this.length);
    this.length -= held;
    this.position = this.recordStart;
  }

  /** Refuses the line on which the open quote stands; what follows it is scanned again without the quote. */
  private giveUpQuote(): boolean {
    if (this.secondLine < 0) return false;
    this.options.onRefused(this.recordLine, "unclosed-quote");
    this.line = this.recordLine + 1;
    this.position = this.secondLine;
    this.beginRecord(this.secondLine);
    return true;
  }
}
