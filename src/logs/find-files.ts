import { readdirSync, realpathSync, statSync } from "node:fs";
import { join, relative, resolve } from "node:path";
import type { LogFile } from "./rows.ts";

/**
 * Finds log files by plain paths or globs: `*` and `?` stand for characters of one name, `[…]` for one of a set,
 * `**` for any number of folders. Names that begin with a dot are matched only by a pattern that begins so.
 * Links to folders are followed, but never round in a loop.
 * @param patterns  relative to `baseFolder`; forward slashes
 * @returns regular files, each once, in code-point order of their names (relative to `baseFolder`)
 */
export function findLogFiles(patterns: readonly string[], baseFolder: string): LogFile[] {
  const found = new Map<string, LogFile>();
  for (const pattern of patterns) {
    const parts = pattern.split("/");
    const absolute = parts[0] === "";
    const root = absolute ? "/" : resolve(baseFolder);
    for (const path of matches(root, absolute ? parts.slice(1) : parts)) {
      found.set(path, { path, name: relative(baseFolder, path).replaceAll("\\", "/") });
    }
  }
  return [...found.values()].sort((a, b) => byCodePoint(a.name, b.name));
}

const GLOB_SIGNS = /[*?[]/;

function matches(root: string, parts: readonly string[]): string[] {
  // A path that exists as it is written is meant, even if its name holds signs of a glob.
  const plain = join(root, ...parts);
  if (isFile(plain)) return [plain];
  if (!parts.some((part) => GLOB_SIGNS.test(part))) return [];
  const paths: string[] = [];
  walk(root, parts, [], paths);
  return paths;
}

function walk(folder: string, parts: readonly string[], trail: readonly string[], paths: string[]): void {
  const [part, ...rest] = parts;
  if (part === undefined) return;
  if (part === "" || part === ".") {
    walk(folder, rest, trail, paths);
    return;
  }
  if (part === "**") {
    const here = realPath(folder);
    if (here === null || trail.includes(here)) return;
    walk(folder, rest, trail, paths);
    for (const entry of entries(folder))
      if (!entry.startsWith(".") && isFolder(join(folder, entry)))
        walk(join(folder, entry), parts, [...trail, here], paths);
    return;
  }
  const names = GLOB_SIGNS.test(part) ? entries(folder).filter(nameMatcher(part)) : [part];
  for (const name of names) {
    const path = join(folder, name);
    if (rest.length === 0) {
      if (isFile(path)) paths.push(path);
    } else if (isFolder(path)) walk(path, rest, trail, paths);
  }
}

/** Whether a name matches one part of a glob. */
export function nameMatcher(part: string): (name: string) => boolean {
  let source = "";
  for (let i = 0; i < part.length; i++) {
    const sign = part[i]!;
    const close =
      sign === "[" ? part.indexOf("]", part[i + 1] === "!" || part[i + 1] === "^" ? i + 3 : i + 2) : -1;
    if (sign === "*") source += "[^/]*";
    else if (sign === "?") source += "[^/]";
    else if (close > 0) {
      const not = part[i + 1] === "!" || part[i + 1] === "^";
      const set = part.slice(i + (not ? 2 : 1), close).replace(/[\\\]^[]/g, "\\$&");
      source += `[${not ? "^" : ""}${set}]`;
      i = close;
    } else source += sign.replace(/[.*+?^${}()|[\]\\/]/g, "\\$&");
  }
  let pattern: RegExp;
  try {
    pattern = new RegExp(`^(?:${source})$`, "us");
  } catch {
    // A set such as [z-a] is no set: the part then means itself.
    return (name) => name === part;
  }
  const hidden = part.startsWith(".");
  return (name) => (hidden || !name.startsWith(".")) && pattern.test(name);
}

function entries(folder: string): string[] {
  try {
    return readdirSync(folder).sort(byCodePoint);
  } catch {
    return [];
  }
}

function isFile(path: string): boolean {
  try {
    return statSync(path).isFile();
  } catch {
    return false;
  }
}

function isFolder(path: string): boolean {
  try {
    return statSync(path).isDirectory();
  } catch {
    return false;
  }
}

function realPath(path: string): string | null {
  try {
    return realpathSync(path);
  } catch {
    return null;
  }
}

/** UTF-16 order puts characters beyond U+FFFF before some within it; code points do not. */
function byCodePoint(a: string, b: string): number {
  const left = Array.from(a);
  const right = Array.from(b);
  const shared = Math.min(left.length, right.length);
  for (let i = 0; i < shared; i++) {
    const difference = left[i]!.codePointAt(0)! - right[i]!.codePointAt(0)!;
    if (difference !== 0) return difference;
  }
  return left.length - right.length;
}
