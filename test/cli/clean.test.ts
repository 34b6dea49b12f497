import { chmodSync, existsSync, mkdirSync, readdirSync } from "node:fs";
import { join } from "node:path";
import { describe, expect, it } from "vitest";
import { account, copy, forebay, place, put, ROOT, rows, text } from "./harness.ts";

const folder = place();

const log = (n: number, value: (i: number) => string | number, from = 0) =>
  `t,x\n${Array.from({ length: n }, (_, i) => `${from + i},${value(i)}\n`).join("")}`;

const pipeline = (chain: string, more = "") => `name: job
logs: { files: log*.csv, time: { column: t, form: unix-s } }
channels: { x: { column: x, unit: m } }
chain:
${chain}
writes: { folder: out }
${more}`;

const SMOOTH = `  - { stage: resample, interval: 1 s }
  - { stage: moving-average, points: 5 }
  - { stage: report }`;

describe("clean", () => {
  it("gives the same bytes again, wherever it stands and whenever it runs", () => {
    const a = join(folder, "a");
    const b = join(folder, "b", "deeper");
    for (const to of [a, b]) {
      copy(join(ROOT, "pipelines"), join(to, "pipelines"));
      copy(join(ROOT, "sample-data"), join(to, "sample-data"));
    }
    expect(forebay(a, "clean", "pipelines/seiche-level.yaml", "--quiet").status).toBe(0);
    expect(forebay(ROOT, "clean", join(b, "pipelines", "seiche-level.yaml"), "--quiet").status).toBe(0);
    const out = join("cleaned", "seiche-level");
    const names = readdirSync(join(a, out)).filter((n) => n !== "runs.jsonl");
    expect(names.sort()).toEqual([
      "seiche-level.account.json",
      "seiche-level.clean.csv",
      "seiche-level.report.html",
    ]);
    for (const name of names) expect(text(b, out, name)).toBe(text(a, out, name));
  });

  it("books every row of every sample log, and digests what it wrote", () => {
    for (const name of ["seiche-level", "pump-bearing", "intake-temperature"]) {
      const run = forebay(
        folder,
        "clean",
        join(ROOT, "pipelines", `${name}.yaml`),
        "--folder",
        `out-${name}`,
      );
      expect(run.status).toBe(0);
      const a = account(folder, `out-${name}`, `${name}.account.json`);
      for (const { rows: r } of a.inputs) {
        const aside = Object.values(r.set_aside).reduce((x, y) => x + y, 0);
        expect(r.read).toBe(r.used + r.merged + aside);
      }
      for (const s of a.stages)
        for (const c of Object.values(s.channels))
          for (const b of c.bands) expect(Math.abs(b.closure ?? 0)).toBeLessThan(1e-9);
      expect(a.verdict.met).toBe(true);
      expect(rows(folder, `out-${name}`, `${name}.clean.csv`).length).toBe(a.outputs[0]!.rows);
    }
  });

  it("gives kept + removed = input at the times of the clean series", () => {
    const out = "out-intake-temperature";
    const removed = new Map(rows(folder, out, "intake-temperature.removed.csv").map((r) => [r[0]!, r[1]!]));
    const plain = put(
      folder,
      "plain.yaml",
      text(ROOT, "pipelines", "intake-temperature.yaml")
        .replace("../sample-data", join(ROOT, "sample-data"))
        .replace(
          /chain:[\s\S]*?requirements:/,
          "chain:\n  - { stage: resample, interval: 1 min, longest-gap: 15 min }\nrequirements:",
        )
        .replace(/requirements:[\s\S]*?writes:/, "writes:")
        .replace("digits: 5", "")
        .replace("removed: true", ""),
    );
    expect(forebay(folder, "clean", plain, "--folder", "plain", "--quiet").status).toBe(0);
    const input = new Map(rows(folder, "plain", "intake-temperature.clean.csv").map((r) => [r[0]!, r[1]!]));
    let compared = 0;
    for (const [time, y] of rows(folder, out, "intake-temperature.clean.csv")) {
      if (y === "") continue;
      compared++;
      // Five significant digits were asked for in both files.
      expect(Math.abs(Number(y) + Number(removed.get(time!)) - Number(input.get(time!)))).toBeLessThan(1e-3);
    }
    expect(compared).toBeGreaterThan(500);
  });

  it("refuses an unprotected decimation with exit 2 before any log is read, naming where the tone lands", () => {
    put(
      folder,
      "log1.csv",
      log(400, (i) => Math.sin(2 * Math.PI * 0.3 * i).toFixed(6)),
    );
    put(
      folder,
      "job.yaml",
      pipeline(
        "  - { stage: resample, interval: 1 s }\n  - { stage: decimate, by: 4, anti-alias: upstream }",
      ),
    );
    const run = forebay(folder, "clean", "job.yaml");
    expect(run.status).toBe(2);
    expect(run.stderr).toMatch(
      /^job\.yaml:6:\d+: decimate: keeping every 4th sample would fold [\d.]+ Hz to [\d.]+ Hz/,
    );
    expect(existsSync(join(folder, "out"))).toBe(false);
  });

  it("marks the series suspect with exit 4 when a tone folds in on the data, and says where it lands", () => {
    // 0.3 Hz behind a filter 62 dB down there: the design passes -60 dB, the tone is 1e6 times the rest.
    let seed = 7;
    const noise = () => (seed = (seed * 16807) % 2147483647) / 2147483647 - 0.5;
    put(
      folder,
      "log1.csv",
      log(6000, (i) => (1e6 * Math.sin(2 * Math.PI * 0.3 * i) + noise()).toFixed(4)),
    );
    put(
      folder,
      "job.yaml",
      pipeline(`  - { stage: resample, interval: 1 s }
  - { stage: fir, shape: low-pass, pass: 0.05 Hz, stop: 0.14 Hz, attenuation: 62 dB }
  - { stage: decimate, by: 4, anti-alias: upstream }
  - { stage: report }`),
    );
    const run = forebay(folder, "clean", "job.yaml");
    expect(run.status).toBe(4);
    const a = account(folder, "out", "job.account.json");
    const alias = a.stages[2]!.alias!;
    expect(alias.design_met).toBe(true);
    expect(alias.met).toBe(false);
    expect(alias.source_Hz!).toBeCloseTo(0.3, 2);
    expect(alias.lands_at_Hz!).toBeCloseTo(0.05, 2);
    expect(a.verdict.met).toBe(false);
    expect(run.stdout).toMatch(/NOT MET[\s\S]*folds to/);
    const flags = new Set(
      rows(folder, "out", "job.clean.csv")
        .filter((r) => r[1] !== "")
        .map((r) => r[2]),
    );
    expect(flags).toEqual(new Set(["3"]));
  });

  it("refuses a grid coarser than the log with exit 2, and takes it when accepted in writing", () => {
    put(
      folder,
      "log1.csv",
      log(400, (i) => i),
    );
    put(folder, "job.yaml", pipeline("  - { stage: resample, interval: 10 s, longest-gap: 30 s }"));
    const refused = forebay(folder, "clean", "job.yaml");
    expect(refused.status).toBe(2);
    expect(refused.stderr).toContain("the grid is coarser than the log");
    put(
      folder,
      "job.yaml",
      pipeline("  - { stage: resample, interval: 10 s, longest-gap: 30 s, accept-aliasing: true }"),
    );
    expect(forebay(folder, "clean", "job.yaml").status).toBe(0);
    const settings = account(folder, "out", "job.account.json").stages[0]!.settings;
    expect(settings["accept-aliasing"]).toBe(true);
  });

  it("goes on past a bad log with exit 3, and says what is wrong with it", () => {
    put(
      folder,
      "log1.csv",
      log(50, (i) => i),
    );
    put(folder, "log2.csv", "");
    put(
      folder,
      "log3.csv",
      log(50, (i) => i, 50),
    );
    put(folder, "job.yaml", pipeline(SMOOTH));
    const run = forebay(folder, "clean", "job.yaml");
    expect(run.status).toBe(3);
    expect(run.stderr).toMatch(/log2\.csv/);
    expect(rows(folder, "out", "job.clean.csv").length).toBe(100);
    put(
      folder,
      "log2.csv",
      log(1, () => 99, 100),
    );
    expect(forebay(folder, "clean", "job.yaml").status).toBe(0);
  });

  it("makes one series a logger", () => {
    for (const name of ["north", "south"])
      put(
        folder,
        `many/${name}/level-1.csv`,
        log(50, (i) => i),
      );
    put(
      folder,
      "many.yaml",
      pipeline(SMOOTH)
        .replace("log*.csv", "'many/{logger}/level-{date}.csv'")
        .replace("folder: out", "folder: 'many-out/{logger}'"),
    );
    const run = forebay(folder, "clean", "many.yaml");
    expect(run.status).toBe(0);
    for (const name of ["north", "south"]) {
      expect(account(folder, "many-out", name, "job.account.json").logger).toBe(name);
    }
  });

  it("writes only what lies between --from and --until, with the same values", () => {
    put(
      folder,
      "log1.csv",
      log(200, (i) => (i * i) % 17),
    );
    put(
      folder,
      "log2.csv",
      log(1, () => 0, 200),
    );
    put(
      folder,
      "log3.csv",
      log(1, () => 0, 201),
    );
    put(folder, "job.yaml", pipeline(SMOOTH));
    expect(forebay(folder, "clean", "job.yaml", "--folder", "all").status).toBe(0);
    const part = ["--from", "1970-01-01T00:01:00Z", "--until", "1970-01-01T00:02:00Z"];
    expect(forebay(folder, "clean", "job.yaml", "--folder", "part", ...part).status).toBe(0);
    expect(rows(folder, "part", "job.clean.csv")).toEqual(
      rows(folder, "all", "job.clean.csv").slice(60, 120),
    );
  });

  it("leaves nothing half-written where it cannot write, and says why", () => {
    mkdirSync(join(folder, "shut"));
    chmodSync(join(folder, "shut"), 0o555);
    put(folder, "shut-file", "not a folder");
    const run = forebay(folder, "clean", "job.yaml", "--folder", "shut-file");
    expect(run.status).toBe(3);
    expect(run.stderr).toMatch(/could not be written/);
    expect(run.stderr).not.toMatch(/\n {4}at /);
    expect(text(folder, "shut-file")).toBe("not a folder");
  });

  it("refuses hostile names in one diagnostic each, and never sends their signs to the terminal", () => {
    const name = (text: string) => pipeline(SMOOTH).replace("{ x: {", `{ ${JSON.stringify(text)}: {`);
    for (const hostile of [
      "<img src=x onerror=alert(1)>",
      "=cmd|'/c calc'!A0",
      "a\u001b[31mred",
      "../up",
      "time",
    ]) {
      put(folder, "hostile.yaml", name(hostile));
      const run = forebay(folder, "clean", "hostile.yaml");
      expect(run.status, hostile).toBe(2);
      expect(run.stderr.match(/^hostile\.yaml:\d+:\d+: /gm)?.length, hostile).toBe(1);
      expect(run.stderr).not.toContain("\u001b");
    }
  });

  it("does not mind a closed pipe", () => {
    const run = forebay(folder, "schema");
    expect(run.status).toBe(0);
    expect(JSON.parse(run.stdout)["$schema"]).toContain("2020-12");
  });
});

describe("rehearse", () => {
  it("prints a table that fits 80 columns, and the same keys as JSON", () => {
    for (const name of ["seiche-level", "pump-bearing", "intake-temperature"]) {
      const run = forebay(ROOT, "rehearse", `pipelines/${name}.yaml`);
      expect(run.status).toBe(0);
      for (const line of run.stdout.split("\n")) expect(line.length, line).toBeLessThanOrEqual(80);
      const json = JSON.parse(forebay(ROOT, "rehearse", `pipelines/${name}.yaml`, "--json").stdout);
      expect(Object.keys(json)).toEqual(["stages", "chain", "requirements"]);
      expect(json.stages[0].stage).toBe("resample");
    }
  });

  it("ends with 4 when a requirement cannot be met", () => {
    put(
      folder,
      "hard.yaml",
      pipeline(
        SMOOTH,
        "requirements: { delay: 0 s, remove: [{ from: 0.1 Hz, to: 0.5 Hz, attenuation: 60 dB }] }\n",
      ),
    );
    const run = forebay(folder, "rehearse", "hard.yaml");
    expect(run.status).toBe(4);
    expect(run.stdout).toContain("NOT MET");
  });
});
