import { appendFileSync, readFileSync, renameSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { beforeAll, describe, expect, it } from "vitest";
import { forebay, place, put, text } from "./harness.ts";

const folder = place();
const ACCOUNT = "cleaned/tank/tank.account.json";

/** Flips one bit of a file at a place. */
function flip(path: string, at: number): () => void {
  const bytes = readFileSync(path);
  const before = Buffer.from(bytes);
  bytes[at]! ^= 1;
  writeFileSync(path, bytes);
  return () => writeFileSync(path, before);
}

describe("recheck", () => {
  beforeAll(() => {
    const rows = Array.from(
      { length: 900 },
      (_, i) => `${i},${(Math.sin(i / 20) + (i % 7) / 50).toFixed(3)}`,
    );
    put(folder, "work/logs/tank.csv", `t,level\n${rows.join("\n")}\n`);
    put(
      folder,
      "work/pipelines/tank.yaml",
      `name: tank
logs: { files: ../logs/tank.csv, time: { column: t, form: unix-s } }
channels: { level: { column: level, unit: m } }
chain:
  - { stage: resample, interval: 1 s }
  - { stage: moving-average, points: 9 }
  - { stage: report }
writes: { folder: ../cleaned/tank, removed: true }
`,
    );
    expect(forebay(join(folder, "work"), "clean", "pipelines/tank.yaml").status).toBe(0);
  });

  const check = (root: string, ...more: string[]) => forebay(join(folder, root), "recheck", ACCOUNT, ...more);

  it("makes the run again and finds everything the same", () => {
    const run = check("work");
    expect(run.stderr).toBe("");
    expect(run.status).toBe(0);
    expect(run.stdout).toContain("every output is the same, byte for byte");
    expect(run.stdout).not.toContain("DIFFERENT");
    expect(run.stdout).toContain("kept + removed = input at 892 samples");
  });

  it("names the input, the pipeline line, or the output in which one bit was flipped", () => {
    const cases: [string, number, RegExp][] = [
      ["work/logs/tank.csv", 4000, /First difference: input \.\.\/logs\/tank\.csv/],
      ["work/pipelines/tank.yaml", 250, /First difference: pipeline pipelines\/tank\.yaml: line \d+ was/],
      ["work/cleaned/tank/tank.clean.csv", 3000, /First difference: output tank\.clean\.csv/],
      ["work/cleaned/tank/tank.removed.csv", 3000, /First difference: output tank\.removed\.csv/],
    ];
    for (const [file, at, expected] of cases) {
      const mend = flip(join(folder, file), at);
      const run = check("work");
      mend();
      expect(run.status, file).toBe(4);
      expect(run.stdout.replaceAll(/\s+/g, " "), file).toMatch(expected);
    }
    expect(check("work").status).toBe(0);
  });

  it("sees rows that were added to a log, and a log that is gone", () => {
    const log = join(folder, "work/logs/tank.csv");
    const before = text(log);
    appendFileSync(log, "900,1\n");
    expect(check("work").stdout.replaceAll(/\s+/g, " ")).toMatch(
      /input \.\.\/logs\/tank\.csv: \d+ bytes were read, it has \d+/,
    );
    writeFileSync(log, before);
    renameSync(log, `${log}.away`);
    const gone = check("work");
    expect(gone.status).toBe(4);
    expect(gone.stdout).toContain("it is not there");
    renameSync(`${log}.away`, log);
  });

  it("works on a moved folder", () => {
    renameSync(join(folder, "work"), join(folder, "elsewhere"));
    expect(check("elsewhere").status).toBe(0);
    renameSync(join(folder, "elsewhere"), join(folder, "work"));
  });

  it("says what is wrong with what is not an account", () => {
    put(folder, "work/other.json", "{}");
    for (const name of ["other.json", "nothing.json", "logs/tank.csv"]) {
      const run = forebay(join(folder, "work"), "recheck", name);
      expect(run.status).toBe(2);
      expect(run.stderr).toMatch(/given[\s\S]*allowed[\s\S]*do /);
    }
  });
});
