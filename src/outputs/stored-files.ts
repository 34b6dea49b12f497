/** Files that lie on the disk already: their digests, and finding one by its digest. */
import { createHash } from "node:crypto";
import {
  closeSync,
  mkdtempSync,
  openSync,
  readdirSync,
  readFileSync,
  readSync,
  rmSync,
  statSync,
} from "node:fs";
import { tmpdir } from "node:os";
import { dirname, join } from "node:path";

export interface StoredFile {
  readonly bytes: number;
  readonly sha256: string;
}

/** Length and digest of a file, read in pieces; null when it is not there or cannot be read. */
export function storedFile(path: string): StoredFile | null {
  let handle: number;
  try {
    handle = openSync(path, "r");
  } catch {
    return null;
  }
  try {
    const digest = createHash("sha256");
    const piece = Buffer.alloc(1 << 16);
    let bytes = 0;
    for (let n = readSync(handle, piece); n > 0; n = readSync(handle, piece)) {
      digest.update(piece.subarray(0, n));
      bytes += n;
    }
    return { bytes, sha256: digest.digest("hex") };
  } catch {
    return null;
  } finally {
    closeSync(handle);
  }
}

/** Text of a file; null when it is not there or cannot be read. */
export function storedText(path: string): string | null {
  try {
    return readFileSync(path, "utf8");
  } catch {
    return null;
  }
}

/** Byte position (0-based) and line (1-based) where two files first differ; null when they are the same. */
export function firstDifference(a: string, b: string): { byte: number; line: number } | null {
  const x = readFileSync(a);
  const y = readFileSync(b);
  const shared = Math.min(x.length, y.length);
  let line = 1;
  for (let i = 0; i < shared; i++) {
    if (x[i] !== y[i]) return { byte: i, line };
    if (x[i] === 10) line++;
  }
  return x.length === y.length ? null : { byte: shared, line };
}

/** Folders looked through at most, so that a search from a root folder ends soon. */
const MOST_FOLDERS = 400;
const LONGEST = 1_000_000;

/**
 * Looks for a file with one of some endings that satisfies a test: in the folder and its subfolders, then the
 * same from its parents, up to `up` levels; nearest first.
 */
export function findNear(
  folder: string,
  up: number,
  ending: RegExp,
  test: (text: string) => boolean,
): string | null {
  const seen = new Set<string>();
  let from = folder;
  for (let level = 0; level <= up; level++) {
    const found = search(from, 2, ending, test, seen);
    if (found !== null) return found;
    const parent = dirname(from);
    if (parent === from) break;
    from = parent;
  }
  return null;
}

function search(
  folder: string,
  depth: number,
  ending: RegExp,
  test: (text: string) => boolean,
  seen: Set<string>,
): string | null {
  if (seen.size > MOST_FOLDERS) return null;
  const names = seen.has(folder) ? [] : namesIn(folder);
  seen.add(folder);
  for (const name of names) {
    const path = join(folder, name);
    if (!ending.test(name)) continue;
    const stat = statSync(path, { throwIfNoEntry: false });
    if (stat?.isFile() !== true || stat.size > LONGEST) continue;
    const text = storedText(path);
    if (text !== null && test(text)) return path;
  }
  if (depth === 0) return null;
  for (const name of namesIn(folder)) {
    if (name.startsWith(".") || name === "node_modules") continue;
    const path = join(folder, name);
    if (statSync(path, { throwIfNoEntry: false })?.isDirectory() !== true) continue;
    const found = search(path, depth - 1, ending, test, seen);
    if (found !== null) return found;
  }
  return null;
}

function namesIn(folder: string): string[] {
  try {
    return readdirSync(folder).sort();
  } catch {
    return [];
  }
}

/** Runs something with a folder of its own that is removed afterwards. */
export async function withTemporaryFolder<T>(run: (folder: string) => Promise<T>): Promise<T> {
  const folder = mkdtempSync(join(tmpdir(), "forebay-"));
  try {
    return await run(folder);
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}
