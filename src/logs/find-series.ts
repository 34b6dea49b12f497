import { statSync } from "node:fs";
import { relative } from "node:path";
import { findLogFiles } from "./find-files.ts";
import type { LogFile } from "./rows.ts";

/** The log files of one logger, in order of name. */
export interface Series {
  /** What stood in place of {logger}; null when the pattern has no such place. */
  readonly logger: string | null;
  readonly files: readonly LogFile[];
}

/**
 * Finds log files and groups them: `{logger}` makes one series a logger, `{date}` stands for any text.
 * @param patterns  paths or globs, relative to `base`
 * @param nameBase  folder that names in accounts are relative to
 */
export function findSeries(patterns: readonly string[], base: string, nameBase: string): Series[] {
  const series = new Map<string | null, Map<string, LogFile>>();
  for (const pattern of patterns) {
    const extract = pattern.includes("{logger}") ? loggerPattern(pattern) : null;
    for (const file of findLogFiles([pattern.replace(/\{(logger|date)\}/g, "*")], base)) {
      let logger: string | null = null;
      if (extract !== null) {
        const found = extract.exec(file.path.replaceAll("\\", "/"));
        if (found === null) continue;
        logger = found.groups!["logger"]!;
      }
      const name = relative(nameBase, file.path).replaceAll("\\", "/");
      const files = series.get(logger) ?? new Map<string, LogFile>();
      files.set(file.path, { path: file.path, name });
      series.set(logger, files);
    }
  }
  return [...series.entries()]
    .sort(([a], [b]) => compare(a ?? "", b ?? ""))
    .map(([logger, files]) => ({
      logger,
      files: [...files.values()].sort((a, b) => compare(a.name, b.name)),
    }));
}

const compare = (a: string, b: string): number => (a < b ? -1 : a > b ? 1 : 0);

/** Matches the end of a full path; every {logger} must stand for the same text, inside one folder name. */
function loggerPattern(pattern: string): RegExp {
  const parts = pattern.replaceAll("\\", "/").replace(/^(\.\.?\/)+/, "");
  let seen = false;
  const source = parts.replace(/\{logger\}|\{date\}|\*\*\/|\*\*|\*|\?|\[[^\]]*\]|[^*?[{]+|./g, (token) => {
    if (token === "{logger}") {
      if (seen) return "\\k<logger>";
      seen = true;
      return "(?<logger>[^/]+?)";
    }
    if (token === "{date}") return "[^/]+?";
    if (token === "**/") return "(?:.*/)?";
    if (token === "**") return ".*";
    if (token === "*") return "[^/]*";
    if (token === "?") return "[^/]";
    if (/^\[[^\]]*\]$/.test(token)) return token.replace("[!", "[^");
    return token.replace(/[.*+?^${}()|[\]\\]/g, "\\$&");
  });
  return new RegExp(`(?:^|/)${source}$`, "u");
}

/** Splits off the files that changed less than `quiet_ms` before `now_ms`: a logger may still be writing them. */
export function settledOnly(
  files: readonly LogFile[],
  quiet_ms: number,
  now_ms: number,
): { settled: LogFile[]; unsettled: LogFile[] } {
  const settled: LogFile[] = [];
  const unsettled: LogFile[] = [];
  for (const file of files) {
    const changed = statSync(file.path, { throwIfNoEntry: false })?.mtimeMs;
    (changed === undefined || now_ms - changed >= quiet_ms ? settled : unsettled).push(file);
  }
  return { settled, unsettled };
}
