import { createHash } from "node:crypto";
import { createReadStream } from "node:fs";
import { createGunzip } from "node:zlib";
import type { LogFile } from "./rows.ts";

/** Gives the bytes of a log as they lie on disk, from the start, each time it is called. */
export type ByteSource = (file: LogFile) => AsyncIterable<Uint8Array>;

export const fromDisk: ByteSource = (file) => createReadStream(file.path, { highWaterMark: 1 << 17 });

/**
 * Pieces in which compressed bytes are unpacked: small, so that what they grow into stays small too, and so that
 * little is lost in front of damaged bytes.
 */
const PACKED_PIECE = 1 << 10;

/** Byte count and SHA-256 of everything that flowed through `tap`. */
export class Digest {
  bytes = 0;
  private readonly hash = createHash("sha256");

  async *tap(source: AsyncIterable<Uint8Array>): AsyncGenerator<Uint8Array> {
    for await (const chunk of source) {
      this.bytes += chunk.length;
      this.hash.update(chunk);
      yield chunk;
    }
  }

  /** Lower-case hexadecimal; may be asked once. */
  sha256(): string {
    return this.hash.digest("hex");
  }
}

/** The digest of a whole file, for logs that are not read to their end. */
export async function digestOf(
  source: AsyncIterable<Uint8Array>,
): Promise<{ bytes: number; sha256: string }> {
  const digest = new Digest();
  for await (const _ of digest.tap(source));
  return { bytes: digest.bytes, sha256: digest.sha256() };
}

export function isGzip(head: Uint8Array): boolean {
  return head[0] === 0x1f && head[1] === 0x8b;
}

/**
 * The bytes as text was written: gzip is recognised by its first two bytes, whatever the name, and unpacked.
 * @throws an Error from zlib where compressed bytes are damaged or cut short, after all that came before
 */
export async function* unpacked(source: AsyncIterable<Uint8Array>): AsyncGenerator<Uint8Array> {
  const chunks = source[Symbol.asyncIterator]();
  try {
    let head: Uint8Array = new Uint8Array(0);
    let next = await chunks.next();
    while (next.done !== true && head.length < 2) {
      head = head.length === 0 ? next.value : Buffer.concat([head, next.value]);
      if (head.length < 2) next = await chunks.next();
    }
    const rest = { [Symbol.asyncIterator]: () => chunks };
    if (isGzip(head)) yield* gunzipped(inPieces(head, rest, PACKED_PIECE));
    else {
      if (head.length > 0) yield head;
      yield* rest;
    }
  } finally {
    await chunks.return?.();
  }
}

async function* gunzipped(pieces: AsyncIterable<Uint8Array>): AsyncGenerator<Uint8Array> {
  const gunzip = createGunzip();
  let ready: Buffer[] = [];
  let failure: Error | null = null;
  let wake = (): void => {};
  gunzip.on("data", (chunk: Buffer) => ready.push(chunk));
  gunzip.on("end", () => wake());
  // Zero bytes behind the packed part end it before its writer does; only the closing is then still to come.
  gunzip.on("close", () => wake());
  gunzip.on("error", (error) => {
    failure = error;
    wake();
  });
  // One piece at a time: what it unpacks to is handed on before the next one, so nothing piles up.
  const settled = (act: (done: () => void) => void): Promise<void> =>
    new Promise((resolve) => {
      wake = resolve;
      act(resolve);
    });
  try {
    for await (const piece of pieces) {
      await settled((done) => gunzip.write(piece, done));
      yield* ready;
      ready = [];
      if (failure !== null) throw failure;
    }
    await settled(() => gunzip.end());
    yield* ready;
    if (failure !== null) throw failure;
  } finally {
    gunzip.destroy();
  }
}

/** Cuts a stream into pieces of equal size (the last may be shorter), so that nothing depends on its chunks. */
async function* inPieces(
  head: Uint8Array,
  rest: AsyncIterable<Uint8Array>,
  size: number,
): AsyncGenerator<Uint8Array> {
  let parts: Uint8Array[] = [head];
  let held = head.length;
  function* whole(): Generator<Uint8Array> {
    if (held < size) return;
    const all = parts.length === 1 ? parts[0]! : Buffer.concat(parts, held);
    const end = held - (held % size);
    for (let at = 0; at < end; at += size) yield all.subarray(at, at + size);
    parts = end < held ? [all.slice(end)] : [];
    held -= end;
  }
  yield* whole();
  for await (const chunk of rest) {
    parts.push(chunk);
    held += chunk.length;
    yield* whole();
  }
  if (held > 0) yield Buffer.concat(parts, held);
}
