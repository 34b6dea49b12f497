import { readFileSync } from "node:fs";
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { ZoneOffsets } from "../../src/logs/zone-offsets.ts";
import { asideOf, iso, readerOf, readTexts } from "./in-memory.ts";

interface Case {
  id: string;
  inputs: { zone?: string; local?: string; localTimesInFileOrder?: string[] };
  expected: { kind?: string; utc: string[] };
}
const reference = JSON.parse(
  readFileSync(new URL("../reference/21-timestamps.json", import.meta.url), "utf8"),
) as { cases: Case[] };
const cases = reference.cases.filter((c) => c.inputs.zone !== undefined);
const micros = (utc: string): number => Date.parse(utc) * 1000;

describe("local clocks (reference 21)", () => {
  for (const { id, inputs, expected } of cases.filter((c) => c.inputs.local !== undefined))
    it(id, () => {
      expect(new ZoneOffsets(inputs.zone!).instants(micros(`${inputs.local}Z`))).toEqual(
        expected.utc.map(micros),
      );
      const reader = readerOf("iso-8601", { zone: inputs.zone! });
      const time = reader.time(inputs.local!);
      if (expected.kind === "gap") expect([time, reader.problem]).toEqual([Number.NaN, "no-such-local-time"]);
      else expect(time).toBe(micros(expected.utc[0]!));
    });
  for (const { id, inputs, expected } of cases.filter((c) => c.inputs.localTimesInFileOrder !== undefined))
    it(id, () => {
      const reader = readerOf("iso-8601", { zone: inputs.zone! });
      expect(inputs.localTimesInFileOrder!.map((t) => reader.time(t))).toEqual(expected.utc.map(micros));
    });
});

describe("the repeated hour", () => {
  const read = (zone: string, cells: string[]) => {
    const reader = readerOf("iso-8601", { zone });
    return cells.map((c) => iso(reader.time(c)).slice(11, 16));
  };
  it("is resolved for hourly rows, where only a repeat shows it", () => {
    const cells = ["00:00", "01:00", "02:00", "02:00", "03:00"].map((t) => `2024-10-27 ${t}`);
    expect(read("Europe/Berlin", cells)).toEqual(["22:00", "23:00", "00:00", "01:00", "02:00"]);
  });
  it("keeps exact repeats and slightly late rows in their pass", () => {
    const cells = ["01:45", "02:00", "02:15", "02:15", "02:10", "02:30", "02:45", "02:00", "02:15"].map(
      (t) => `2024-10-27 ${t}`,
    );
    expect(read("Europe/Berlin", cells)).toEqual([
      "23:45",
      "00:00",
      "00:15",
      "00:15",
      "00:10",
      "00:30",
      "00:45",
      "01:00",
      "01:15",
    ]);
  });
  it("works for half an hour (Lord Howe) and in the far south-east", () => {
    const cells = ["01:15", "01:30", "01:45", "01:30", "01:45", "02:00"].map((t) => `2024-04-07 ${t}`);
    expect(read("Australia/Lord_Howe", cells)).toEqual([
      "14:15",
      "14:30",
      "14:45",
      "15:00",
      "15:15",
      "15:30",
    ]);
  });
  it("is named where no row before proves the pass", async () => {
    const text = "time,a\n2024-10-27 02:15:00,1\n2024-10-27 02:30:00,2\n";
    const { accounts } = await readTexts({ log: text }, { time: { column: "time", zone: "Europe/Berlin" } });
    expect(accounts[0]!.found["rows in a repeated hour, by their order"]).toBe(
      "2 in the first pass, 0 in the second; 1 of them without a row before that proves it",
    );
  });
  it("comes out even for every regular log (property)", () => {
    fc.assert(
      fc.property(
        fc.constantFrom(
          "Europe/Berlin",
          "America/New_York",
          "Pacific/Auckland",
          "America/St_Johns",
          "Australia/Lord_Howe",
          "Africa/Casablanca",
          "Asia/Kathmandu",
        ),
        fc.constantFrom(60, 300, 600, 900, 1200, 1800, 3600),
        fc.integer({ min: 0, max: 366 * 24 }),
        (zone, step, hour) => {
          if (zone === "Australia/Lord_Howe" && step === 3600) return;
          const format = new Intl.DateTimeFormat("sv-SE", {
            timeZone: zone,
            dateStyle: "short",
            timeStyle: "medium",
          });
          const start = Date.UTC(2024, 0, 1, hour);
          const utc = Array.from({ length: 40 }, (_, i) => start + i * step * 1000);
          const reader = readerOf("iso-8601", { zone });
          const first = new ZoneOffsets(zone).instants(micros(`${format.format(utc[0]).replace(" ", "T")}Z`));
          const times = utc.map((t) => reader.time(format.format(t)));
          // A log that begins inside a repeated hour cannot say which pass it is.
          if (first.length === 1) expect(times).toEqual(utc.map((t) => t * 1000));
        },
      ),
      { numRuns: 300 },
    );
  });
});

describe("zones", () => {
  it("may be fixed offsets", () => {
    expect(new ZoneOffsets("+01:00").instants(3600e6)).toEqual([0]);
    expect(new ZoneOffsets("-0330").instants(0)).toEqual([3.5 * 3600e6]);
    expect(new ZoneOffsets("UTC").instants(5)).toEqual([5]);
  });
  it("that skip or repeat midnight are right", () => {
    // Samoa went over the date line: 2011-12-30 never was.
    const samoa = new ZoneOffsets("Pacific/Apia");
    expect(samoa.instants(micros("2011-12-30T12:00:00Z"))).toEqual([]);
    expect(samoa.instants(micros("2011-12-31T00:00:00Z"))).toEqual([micros("2011-12-30T10:00:00Z")]);
    // Cuba puts its clocks back from 01:00 to midnight.
    expect(new ZoneOffsets("America/Havana").instants(micros("2024-11-03T00:30:00Z"))).toEqual([
      micros("2024-11-03T04:30:00Z"),
      micros("2024-11-03T05:30:00Z"),
    ]);
  });
  it("give the offset of every instant of a year (property, against Intl)", () => {
    fc.assert(
      fc.property(
        fc.constantFrom(
          "Europe/London",
          "America/Sao_Paulo",
          "Asia/Tehran",
          "Africa/Casablanca",
          "Antarctica/Troll",
        ),
        fc.integer({ min: Date.UTC(1990, 0, 1), max: Date.UTC(2030, 0, 1) }),
        (zone, ms) => {
          const at = Math.floor(ms / 1000) * 1000;
          const local = new Intl.DateTimeFormat("sv-SE", {
            timeZone: zone,
            dateStyle: "short",
            timeStyle: "medium",
          }).format(at);
          expect(new ZoneOffsets(zone).instants(micros(`${local.replace(" ", "T")}Z`))).toContain(at * 1000);
        },
      ),
      { numRuns: 60 },
    );
  });
  it("the hour that was skipped is set aside and counted", async () => {
    const text = "time,a\n2024-03-31 01:30:00,1\n2024-03-31 02:30:00,2\n2024-03-31 03:30:00,3\n";
    const { rows, accounts } = await readTexts(
      { log: text },
      { time: { column: "time", zone: "Europe/Berlin" } },
    );
    expect(rows.map((r) => r[1])).toEqual([1, 3]);
    expect(asideOf(accounts[0]!.rows)).toEqual({ "no-such-local-time": [3] });
  });
});
