import { isUtf8 } from "node:buffer";
import { TextDecoder } from "node:util";

/** How the characters of a log are written, and how that is known. */
export interface Encoding {
  /** Label of the WHATWG Encoding Standard; "utf-8" is checked line by line. */
  readonly label: string;
  readonly found: string;
}

/** Finds the encoding from the first bytes: a byte order mark, or NULs in every other place (UTF-16). */
export function findEncoding(head: Uint8Array, given: string | undefined): Encoding {
  if (head[0] === 0xef && head[1] === 0xbb && head[2] === 0xbf)
    return { label: "utf-8", found: "UTF-8 with byte order mark" };
  if (head[0] === 0xff && head[1] === 0xfe)
    return { label: "utf-16le", found: "UTF-16LE with byte order mark" };
  if (head[0] === 0xfe && head[1] === 0xff)
    return { label: "utf-16be", found: "UTF-16BE with byte order mark" };
  if (given !== undefined) return { label: given.toLowerCase(), found: `${given}, as set in the pipeline` };
  const nuls = [0, 0];
  const length = Math.min(head.length, 4096) & ~1;
  for (let i = 0; i < length; i++) if (head[i] === 0) nuls[i & 1]!++;
  const places = length / 2;
  if (places >= 4) {
    if (nuls[1]! > 0.7 * places && nuls[0]! < 0.1 * places)
      return { label: "utf-16le", found: "UTF-16LE, found from its zero bytes" };
    if (nuls[0]! > 0.7 * places && nuls[1]! < 0.1 * places)
      return { label: "utf-16be", found: "UTF-16BE, found from its zero bytes" };
  }
  return { label: "utf-8", found: "UTF-8" };
}

/** True when the label names an encoding that can be decoded. */
export function encodingKnown(label: string): boolean {
  try {
    new TextDecoder(label);
    return true;
  } catch {
    return false;
  }
}

/** Turns the bytes of a log into UTF-8 without byte order mark, piece by piece. */
export class Utf8Stream {
  private readonly decoder: TextDecoder | null;
  private start: Uint8Array | null = new Uint8Array(0);

  constructor(label: string) {
    const decoder = new TextDecoder(label);
    this.decoder = decoder.encoding === "utf-8" ? null : decoder;
  }

  push(chunk: Uint8Array): Uint8Array {
    if (this.decoder !== null) return Buffer.from(this.decoder.decode(chunk, { stream: true }));
    if (this.start === null) return chunk;
    const joined = this.start.length === 0 ? chunk : Buffer.concat([this.start, chunk]);
    if (joined.length < 3) {
      this.start = joined.slice();
      return new Uint8Array(0);
    }
    this.start = null;
    return withoutMark(joined);
  }

  end(): Uint8Array {
    if (this.decoder !== null) return Buffer.from(this.decoder.decode());
    const rest = this.start ?? new Uint8Array(0);
    this.start = null;
    return withoutMark(rest);
  }
}

function withoutMark(bytes: Uint8Array): Uint8Array {
  return bytes[0] === 0xef && bytes[1] === 0xbb && bytes[2] === 0xbf ? bytes.subarray(3) : bytes;
}

/**
 * A line that is not valid UTF-8 is read as Windows-1252, which has ISO 8859-1 (Latin-1) in it: the numbers are
 * the same, and degree signs and umlauts come out right.
 */
export function repairUtf8(bytes: Uint8Array): Uint8Array {
  return isUtf8(bytes) ? bytes : Buffer.from(new TextDecoder("windows-1252").decode(bytes));
}
