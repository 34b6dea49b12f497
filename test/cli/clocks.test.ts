import { describe, expect, it } from "vitest";
import { account, forebay, place, put, rows } from "./harness.ts";

const folder = place();
const pipeline = (time: string, more = "") => `name: clock
logs: { files: log.csv, time: ${time}${more} }
channels: { x: { column: X, unit: m } }
chain: [{ stage: resample, interval: 15 min, longest-gap: 1 h }]
writes: { folder: out }
`;

describe("clocks in the pipeline file", () => {
  it("reads local time over the end of summer time, date and clock in two columns, decimal comma", () => {
    // 27 October 2024, Berlin: 02:00 to 02:45 comes twice (IANA tz database).
    const times = [
      "01:00",
      "01:15",
      "01:30",
      "01:45",
      "02:00",
      "02:15",
      "02:30",
      "02:45",
      "02:00",
      "02:15",
      "02:30",
      "02:45",
      "03:00",
    ];
    put(folder, "log.csv", `Day;Clock;X\n${times.map((t, i) => `27.10.2024;${t};${i},5\n`).join("")}`);
    put(folder, "p.yaml", pipeline("{ column: [Day, Clock], form: dd.MM.yyyy HH:mm, zone: Europe/Berlin }"));
    const run = forebay(folder, "clean", "p.yaml");
    expect(run.status).toBe(0);
    const out = rows(folder, "out", "clock.clean.csv");
    expect(out.map((r) => r[0])).toEqual(
      Array.from({ length: 13 }, (_, i) =>
        new Date(Date.UTC(2024, 9, 26, 23, 15 * i)).toISOString().replace(".000", ""),
      ),
    );
    expect(out.map((r) => r[1])).toEqual(times.map((_, i) => `${i}.5`));
    expect(account(folder, "out", "clock.account.json").inputs[0]!.rows.used).toBe(13);
  });

  it("finds the form when it is certain, and asks when it is not", () => {
    put(folder, "log.csv", `T,X\n${[13, 14, 15].map((d) => `0${1}/${d}/2024 00:00:00,${d}\n`).join("")}`);
    put(
      folder,
      "p.yaml",
      pipeline("{ column: T, zone: UTC }").replace("15 min", "1 d").replace("1 h", "2 d"),
    );
    expect(forebay(folder, "clean", "p.yaml").status).toBe(0);
    expect(rows(folder, "out", "clock.clean.csv")[0]![0]).toBe("2024-01-13T00:00:00Z");
    put(folder, "log.csv", `T,X\n${[1, 2, 3].map((d) => `0${d}/02/2024 00:00:00,${d}\n`).join("")}`);
    const asked = forebay(folder, "clean", "p.yaml");
    expect(asked.status).toBe(3);
    expect(asked.stderr).toMatch(/form/);
  });

  it("names a clock setting that cannot be meant, before any log is read", () => {
    put(folder, "p.yaml", pipeline("{ column: T, form: unix-sec }"));
    const run = forebay(folder, "clean", "p.yaml");
    expect(run.status).toBe(2);
    expect(run.stderr).toMatch(/^p\.yaml:2:\d+: logs\.time\.form: /);
    expect(run.stderr).toContain("write unix-s");
    put(folder, "p.yaml", pipeline("{ column: T, zone: Europe/Berlinn }"));
    expect(forebay(folder, "rehearse", "p.yaml").stderr).toMatch(/^p\.yaml:2:\d+: logs\.time\.zone: /);
  });
});
