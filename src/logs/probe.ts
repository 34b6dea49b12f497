import { type ByteSource, isGzip, unpacked } from "./byte-source.ts";
import { cellsOf } from "./cells.ts";
import { type FoundLayout, findLayout } from "./layout.ts";
import { logProblems } from "./log-problems.ts";
import { MissingCodes } from "./missing-codes.ts";
import { RecordSplitter } from "./record-splitter.ts";
import type { LogFile, ReadRequest } from "./rows.ts";
import { type Encoding, encodingKnown, findEncoding, repairUtf8, Utf8Stream } from "./text-decoding.ts";
import { TimeReader } from "./time-reader.ts";

/** Text looked at to find the layout. */
const HEAD_BYTES = 1 << 16;

/** What is known of a log before its rows are read. */
export interface ProbedLog {
  readonly file: LogFile;
  readonly layout: FoundLayout;
  readonly encoding: Encoding;
  /** Earliest time among the first rows; -Infinity when none of them has a readable time. */
  readonly firstTime_us: number;
  readonly found: Record<string, string>;
}

/** First bytes of files that are often given a .csv name by mistake. */
const SIGNATURES: readonly (readonly [string, string])[] = [
  ["\x89PNG", "a PNG picture"],
  ["\xff\xd8\xff", "a JPEG picture"],
  ["GIF8", "a GIF picture"],
  ["%PDF", "a PDF document"],
  ["PK\x03\x04", "a ZIP archive or a spreadsheet workbook"],
  ["\xd0\xcf\x11\xe0", "an old office document"],
  ["BZh", "a bzip2 archive"],
  ["\x28\xb5\x2f\xfd", "a Zstandard archive"],
  ["\xfd7zXZ", "an XZ archive"],
  ["7z\xbc\xaf", "a 7z archive"],
  ["\x89HDF", "an HDF5 file"],
  ["CDF\x01", "a netCDF file"],
  ["CDF\x02", "a netCDF file"],
  ["SQLite format 3", "an SQLite database"],
];

/**
 * Looks at the first lines of a log.
 * @throws LogProblem when the log cannot be read at all
 */
export async function probeLog(file: LogFile, request: ReadRequest, source: ByteSource): Promise<ProbedLog> {
  const { head, whole, packed } = await readHead(file, source);
  if (head.length === 0) throw logProblems.empty(file.name);
  const encoding = findEncoding(head, request.layout.encoding);
  if (!encodingKnown(encoding.label)) throw logProblems.unknownEncoding(file.name, encoding.label);
  const decoder = new Utf8Stream(encoding.label);
  const bytes = Buffer.concat([decoder.push(head), whole ? decoder.end() : new Uint8Array(0)]);
  checkIsText(file.name, head, bytes);
  const text = wholeLines(Buffer.from(repairUtf8(bytes)).toString(), whole);
  const times = new TimeReader(request.time.form, request.time.zone);
  const missing = new MissingCodes(request.missing);
  const layout = findLayout(file.name, text, request, times, missing);
  const firstTime_us = findFirstTime(file.name, text, whole, layout, request, times);
  const found: Record<string, string> = {
    ...(packed ? { compression: "gzip" } : {}),
    encoding: encoding.found,
    ...layout.found,
    time: timeInWords(request),
  };
  return { file, layout, encoding, firstTime_us, found };
}

async function readHead(
  file: LogFile,
  source: ByteSource,
): Promise<{ head: Buffer; whole: boolean; packed: boolean }> {
  const parts: Uint8Array[] = [];
  let length = 0;
  const first: number[] = [];
  const raw = source(file);
  async function* watched(): AsyncGenerator<Uint8Array> {
    for await (const chunk of raw) {
      for (let i = 0; i < chunk.length && first.length < 2; i++) first.push(chunk[i]!);
      yield chunk;
    }
  }
  let whole = true;
  try {
    for await (const chunk of unpacked(watched())) {
      parts.push(chunk);
      length += chunk.length;
      if (length >= HEAD_BYTES) {
        whole = false;
        break;
      }
    }
  } catch (error) {
    // Damage beyond the first lines is met again, and reported, when the rows are read.
    if (length === 0) {
      if (isGzip(Uint8Array.from(first))) throw logProblems.damaged(file.name, messageOf(error), 0);
      throw logProblems.cannotOpen(file.name, messageOf(error));
    }
    whole = false;
  }
  const head = Buffer.concat(parts, length);
  return {
    head: head.subarray(0, HEAD_BYTES),
    whole: whole && length <= HEAD_BYTES,
    packed: isGzip(Uint8Array.from(first)),
  };
}

/** The message of a system error without the path of this machine. */
export function messageOf(error: unknown): string {
  const text = error instanceof Error ? error.message : String(error);
  return text.replace(/, \w+ '.*'$/, "");
}

function checkIsText(name: string, head: Buffer, decoded: Buffer): void {
  const start = head.subarray(0, 16).toString("latin1");
  const known = SIGNATURES.find(([signature]) => start.startsWith(signature));
  if (known !== undefined) throw logProblems.notText(name, known[1]);
  let control = 0;
  let nul = 0;
  for (const byte of decoded) {
    if (byte === 0) nul++;
    else if (byte < 32 && byte !== 9 && byte !== 10 && byte !== 13 && byte !== 12 && byte !== 26) control++;
  }
  const rest = decoded.length - nul;
  if (rest === 0 && nul > 0) throw logProblems.notText(name, "nothing but zero bytes");
  if (control > 0.02 * rest) throw logProblems.notText(name, "binary data");
}

/** Leaves out a last line that was cut off by the limit of the head. */
function wholeLines(text: string, whole: boolean): string {
  if (whole) return text;
  const end = Math.max(text.lastIndexOf("\n"), text.lastIndexOf("\r"));
  return end < 0 ? text : text.slice(0, end + 1);
}

function findFirstTime(
  name: string,
  text: string,
  whole: boolean,
  layout: FoundLayout,
  request: ReadRequest,
  times: TimeReader,
): number {
  let first = Number.POSITIVE_INFINITY;
  let rows = 0;
  let unreadable: { cell: string; line: number } | undefined;
  let withoutOffset = false;
  const splitter = new RecordSplitter({
    separator: layout.separator,
    comments: true,
    fromLine: layout.dataFromLine,
    onRefused: () => rows++,
    onComment: () => {},
  });
  splitter.push(Buffer.from(text));
  const batch = splitter.end();
  if (batch !== null) {
    cellsOf(batch, layout.separator).forEach((cells, i) => {
      rows++;
      const cell = cells?.[layout.timeIndex];
      if (cell === undefined) return;
      const time = times.time(cell);
      if (!Number.isNaN(time)) first = Math.min(first, time);
      else if (cell !== request.time.column) {
        if (times.problem === "time-without-offset" && !withoutOffset) {
          withoutOffset = true;
          unreadable = undefined;
        }
        unreadable ??= { cell, line: batch.lines[i]! };
      }
    });
  }
  if (rows === 0 && whole) throw logProblems.noRows(name, layout.namesLine);
  if (Number.isFinite(first)) return first;
  if (unreadable !== undefined) {
    if (withoutOffset) throw logProblems.zoneNeeded(name, unreadable.cell, unreadable.line);
    throw logProblems.timesUnreadable(name, unreadable.cell, unreadable.line, request.time.form);
  }
  return Number.NEGATIVE_INFINITY;
}

function timeInWords({ time }: ReadRequest): string {
  return `${time.form}${time.zone === undefined ? "" : `, ${time.zone} where a cell carries no offset`}`;
}
