import { mkdirSync, mkdtempSync, rmSync, symlinkSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { findLogFiles, nameMatcher } from "../../src/logs/find-files.ts";

let folder = "";
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), "logs-"));
  const files = [
    "a.csv",
    "b.csv",
    "b.txt",
    ".hidden.csv",
    "x[1].csv",
    "sub/a.csv",
    "sub/deep/c.csv",
    "other/a.csv",
    "\u{1F30A}.csv",
    "\uFF5E.csv",
  ];
  for (const sub of ["sub/deep", "other", "folder.csv"]) mkdirSync(join(folder, sub), { recursive: true });
  for (const file of files) writeFileSync(join(folder, file), "");
  symlinkSync(folder, join(folder, "sub", "loop"));
  symlinkSync(join(folder, "missing"), join(folder, "broken.csv"));
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

const names = (...patterns: string[]) => findLogFiles(patterns, folder).map((f) => f.name);

describe("finding log files", () => {
  it("takes plain paths and globs, each file once, in code-point order", () => {
    expect(names("b.csv", "a.csv", "*.csv")).toEqual([
      "a.csv",
      "b.csv",
      "x[1].csv",
      "\uFF5E.csv",
      "\u{1F30A}.csv",
    ]);
    expect(names("?.csv")).toEqual(["a.csv", "b.csv", "\uFF5E.csv", "\u{1F30A}.csv"]);
    expect(names("[ab].csv", "[!b].txt")).toEqual(["a.csv", "b.csv"]);
    expect(names("*/a.csv")).toEqual(["other/a.csv", "sub/a.csv"]);
    expect(names("./sub/../a.csv")).toEqual(["a.csv"]);
  });
  it("goes through folders with **, never round in a loop", () => {
    expect(names("**/c.csv")).toEqual(["sub/deep/c.csv"]);
    expect(names("**/[ab].csv")).toEqual(["a.csv", "b.csv", "other/a.csv", "sub/a.csv"]);
    expect(names("sub/**/*.csv")).toEqual(expect.arrayContaining(["sub/a.csv", "sub/deep/c.csv"]));
  });
  it("takes a file whose name holds glob signs as it is written", () => {
    expect(names("x[1].csv")).toEqual(["x[1].csv"]);
  });
  it("finds nothing where nothing is", () => {
    expect(names("none-*.csv", "missing/a.csv", "a.csv/b", "folder.csv", "broken.csv")).toEqual([]);
  });
  it("names are relative to the folder, also above it", () => {
    expect(findLogFiles(["../a.csv"], join(folder, "sub")).map((f) => f.name)).toEqual(["../a.csv"]);
    expect(findLogFiles([join(folder, "a.csv")], folder)).toEqual([
      { path: join(folder, "a.csv"), name: "a.csv" },
    ]);
  });
  it("matches names literally but for the glob signs", () => {
    expect(nameMatcher("a.c*")("abc")).toBe(false);
    expect(nameMatcher("level-[0-9]?.csv")("level-17.csv")).toBe(true);
    expect(nameMatcher("[z-a]")("[z-a]")).toBe(true);
    expect(nameMatcher("[]a]")("]")).toBe(true);
    expect(nameMatcher("[a")("[a")).toBe(true);
  });
});
