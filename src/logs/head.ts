import { isUtf8 } from "node:buffer";
import { type ByteSource, isGzip, unpacked } from "./byte-source.ts";
import { logProblems } from "./log-problems.ts";
import type { LogFile } from "./rows.ts";
import { type Encoding, encodingKnown, findEncoding, repairUtf8, Utf8Stream } from "./text-decoding.ts";

/** The first lines of a log, decoded. */
export interface LogHead {
  /** Whole lines; the last one may lack its line end only where the log itself ends. */
  readonly text: string;
  /** The text is all that the log holds. */
  readonly whole: boolean;
  readonly packed: boolean;
  readonly encoding: Encoding;
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
/** Share of control characters from which on bytes are not text. */
const CONTROL_SHARE = 0.02;

/**
 * Reads the start of a log.
 * @param limit  bytes after unpacking
 * @throws LogProblem when it cannot be opened, is empty, or is not text
 */
export async function readHead(
  file: LogFile,
  source: ByteSource,
  encodingGiven: string | undefined,
  limit: number,
): Promise<LogHead> {
  const { bytes, whole, packed } = await firstBytes(file, source, limit);
  if (bytes.length === 0) throw logProblems.empty(file.name);
  const encoding = findEncoding(bytes, encodingGiven);
  if (!encodingKnown(encoding.label)) throw logProblems.unknownEncoding(file.name, encoding.label);
  const decoder = new Utf8Stream(encoding.label);
  const decoded = Buffer.concat([decoder.push(bytes), whole ? decoder.end() : new Uint8Array(0)]);
  checkIsText(file.name, bytes, decoded);
  const end = whole ? decoded.length : 1 + Math.max(decoded.lastIndexOf(10), decoded.lastIndexOf(13));
  return { text: textOf(decoded.subarray(0, end === 0 ? decoded.length : end)), whole, packed, encoding };
}

async function firstBytes(
  file: LogFile,
  source: ByteSource,
  limit: number,
): Promise<{ bytes: Buffer; whole: boolean; packed: boolean }> {
  const parts: Uint8Array[] = [];
  let length = 0;
  const start: number[] = [];
  async function* watched(): AsyncGenerator<Uint8Array> {
    for await (const chunk of source(file)) {
      for (let i = 0; i < chunk.length && start.length < 2; i++) start.push(chunk[i]!);
      yield chunk;
    }
  }
  let whole = true;
  try {
    for await (const chunk of unpacked(watched())) {
      parts.push(chunk);
      length += chunk.length;
      if (length > limit) {
        whole = false;
        break;
      }
    }
  } catch (error) {
    // Damage beyond the first lines is met again, and reported, when the rows are read.
    if (length === 0) {
      const why = messageOf(error);
      throw isGzip(Uint8Array.from(start))
        ? logProblems.damaged(file.name, why, 0)
        : logProblems.cannotOpen(file.name, why);
    }
    whole = false;
  }
  return {
    bytes: Buffer.concat(parts, length).subarray(0, limit),
    whole,
    packed: isGzip(Uint8Array.from(start)),
  };
}

/** The message of a system error without the path of this machine. */
export function messageOf(error: unknown): string {
  const text = error instanceof Error ? error.message : String(error);
  return text.replace(/, \w+ '.*'$/, "");
}

function checkIsText(name: string, bytes: Buffer, decoded: Buffer): void {
  const start = bytes.subarray(0, 16).toString("latin1");
  const known = SIGNATURES.find(([signature]) => start.startsWith(signature));
  if (known !== undefined) throw logProblems.notText(name, known[1]);
  let control = 0;
  let nul = 0;
  for (const byte of decoded) {
    if (byte === 0) nul++;
    else if (byte < 32 && byte !== 9 && byte !== 10 && byte !== 13 && byte !== 12 && byte !== 26) control++;
  }
  // A logger that lost power leaves runs of zero bytes in good text, so those alone prove nothing.
  if (nul === decoded.length) throw logProblems.notText(name, "nothing but zero bytes");
  if (control > CONTROL_SHARE * (decoded.length - nul)) throw logProblems.notText(name, "binary data");
}

/** Lines that are not UTF-8 are decoded each for itself, so that one of them does not spoil the others. */
function textOf(decoded: Buffer): string {
  if (isUtf8(decoded)) return decoded.toString();
  const lines: string[] = [];
  for (let at = 0; at < decoded.length; ) {
    const found = decoded.indexOf(10, at);
    const end = found < 0 ? decoded.length : found + 1;
    lines.push(Buffer.from(repairUtf8(decoded.subarray(at, end))).toString());
    at = end;
  }
  return lines.join("");
}
