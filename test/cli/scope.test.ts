/** --from and --until that name a time in which a log has no rows. */
import { describe, expect, it } from "vitest";
import { forebay, place, put } from "./harness.ts";

describe("a scope without rows", () => {
  const folder = place();
  const rows = Array.from({ length: 100 }, (_, i) => `${1_900_000_000 + i},${i % 7}`);
  put(folder, "log.csv", `t,x\n${rows.join("\n")}\n`);
  put(
    folder,
    "p.yaml",
    "name: p\nlogs: { files: log.csv, time: { column: t, form: unix-s } }\nchannels: { x: { column: x, unit: m } }\nchain: [{ stage: resample, interval: 1 s }, { stage: moving-average, points: 3 }, { stage: report }]\nwrites: { folder: out }\n",
  );

  it.each([
    ["--until", "2000-01-01"],
    ["--from", "2090-01-01"],
  ])("%s %s is a diagnostic, not a fault", (option, time) => {
    const { status, stderr } = forebay(folder, "clean", "p.yaml", option, time);
    expect(status).toBe(3);
    expect(stderr).toContain("no row lies in the time asked for");
    expect(stderr).toContain("rows from 2030-03-17T17:46:40Z to 2030-03-17T17:48:19Z");
    expect(stderr).not.toMatch(/\n\s+at /);
  });
});
