import { describe, expect, it } from "vitest";
import { account, forebay, place, put, rows, text } from "./harness.ts";

const folder = place();

describe("screening and calibration from log to page", () => {
  it("counts, lists and shows what was kept out, and bridges it like a lost row", () => {
    const value = (i: number) => (i === 100 ? 99 : i === 200 ? -5 : 2 + Math.sin(i / 30));
    put(
      folder,
      "log.csv",
      `t,x\n${Array.from({ length: 600 }, (_, i) => `${i},${value(i).toFixed(3)}\n`).join("")}`,
    );
    put(
      folder,
      "p.yaml",
      `name: s
logs: { files: log.csv, time: { column: t, form: unix-s } }
channels: { x: { column: x, unit: m } }
chain:
  - { stage: calibrate, polynomial: [1, 2] }
  - { stage: screen, range: ["0 m", "10 m"] }
  - { stage: resample, interval: 1 s }
  - { stage: report }
writes: { folder: out }
`.replace('["0 m", "10 m"]', "[0, 10]"),
    );
    const run = forebay(folder, "clean", "p.yaml");
    expect(run.stderr).not.toMatch(/fault|:\d+:\d+:/);
    expect(run.status).toBe(0);
    expect(run.stdout).toContain("2 rejected (range)");
    const out = rows(folder, "out", "s.clean.csv");
    expect(Number(out[99]![1])).toBeCloseTo(1 + 2 * Number(value(99).toFixed(3)), 12);
    // Bridged on the straight line between its neighbours, and flagged.
    expect(Number(out[100]![1])).toBeCloseTo((Number(out[99]![1]) + Number(out[101]![1])) / 2, 12);
    expect(out[100]![2]).toBe("3");
    const notes = account(folder, "out", "s.account.json").stages[1]!.notes["rows"] as Record<
      string,
      { first_rejected: object[] }
    >;
    expect(notes["x"]!.first_rejected).toEqual([
      { time: "1970-01-01T00:01:40Z", value: 199, reason: "range" },
      { time: "1970-01-01T00:03:20Z", value: -9, reason: "range" },
    ]);
    const page = text(folder, "out", "s.report.html");
    expect(page).toContain("rejected: range");
    expect(page).toContain("1970-01-01 00:01:40 UTC");
  });
});
