/** Runs the built command line as a process, in a folder of its own. */
import { type SpawnSyncReturns, spawnSync } from "node:child_process";
import { cpSync, mkdirSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { dirname, join } from "node:path";
import { fileURLToPath } from "node:url";
import { afterAll } from "vitest";
import type { Account } from "../../src/report/account-format.ts";

export const ROOT = join(dirname(fileURLToPath(import.meta.url)), "..", "..");
const BIN = join(ROOT, "dist", "bin.js");

/** A folder that is removed when the test file ends. */
export function place(): string {
  const folder = mkdtempSync(join(tmpdir(), "forebay-test-"));
  afterAll(() => rmSync(folder, { recursive: true, force: true }));
  return folder;
}

export function forebay(cwd: string, ...words: string[]): SpawnSyncReturns<string> {
  return spawnSync(process.execPath, [BIN, ...words], { cwd, encoding: "utf8", maxBuffer: 1 << 28 });
}

export function put(folder: string, name: string, text: string): string {
  const path = join(folder, name);
  mkdirSync(dirname(path), { recursive: true });
  writeFileSync(path, text);
  return path;
}

export const copy = (from: string, to: string): void => cpSync(from, to, { recursive: true });
export const text = (...parts: string[]): string => readFileSync(join(...parts), "utf8");
export const account = (...parts: string[]): Account => JSON.parse(text(...parts)) as Account;

/** Rows of a CSV without quotes, header left out. */
export function rows(...parts: string[]): string[][] {
  return text(...parts)
    .trimEnd()
    .split("\n")
    .slice(1)
    .map((line) => line.split(","));
}
