import { relative, resolve } from "node:path";

/** A path as the person who gave the command would write it: relative where that is shorter, never above twice. */
export function shownPath(path: string): string {
  const full = resolve(path);
  const near = relative(process.cwd(), full);
  if (near === "") return ".";
  return near.startsWith("../../") || near.length > full.length ? full : near.replaceAll("\\", "/");
}
