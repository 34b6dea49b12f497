import { readFileSync } from "node:fs";
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { readUnixTime, UNIX_UNITS } from "../../src/logs/unix-time.ts";
import { readerOf } from "./in-memory.ts";

interface Case {
  id: string;
  inputs: { text?: string; zone?: string; local?: string };
  expected: { action?: string; epochNs?: string };
}
const reference = JSON.parse(
  readFileSync(new URL("../reference/21-timestamps.json", import.meta.url), "utf8"),
) as { cases: Case[] };

/** Nanoseconds to microseconds, half up, in exact integers. */
function roundedMicros(nanos: bigint): number {
  return Number((nanos + 500n - ((((nanos + 500n) % 1000n) + 1000n) % 1000n)) / 1000n);
}

describe("ISO 8601 and RFC 3339 times (reference 21)", () => {
  for (const { id, inputs, expected } of reference.cases.filter((c) => c.inputs.text !== undefined)) {
    it(id, () => {
      const reader = readerOf("iso-8601");
      const time = reader.time(inputs.text!);
      if (expected.action === "reject") {
        expect(time).toBeNaN();
        expect(reader.problem).toBe("unreadable-time");
      } else if (expected.action === "ask") {
        expect(time).toBeNaN();
        expect(reader.problem).toBe("time-without-offset");
      } else expect(time).toBe(roundedMicros(BigInt(expected.epochNs!)));
    });
  }

  it("counts digits finer than a microsecond, and rounds them half up", () => {
    const reader = readerOf("iso-8601");
    expect(reader.time("2024-06-30T12:00:00.1234565Z") % 1e6).toBe(123_457);
    expect(reader.time("2024-06-30T12:00:00.1234564999Z") % 1e6).toBe(123_456);
    expect(reader.time("2024-06-30T12:00:00.123456000Z") % 1e6).toBe(123_456);
    expect(reader.rounded).toBe(2);
    expect(reader.time("1969-12-31T23:59:59.9999995Z")).toBe(0);
  });

  it("takes a leap second only at the end of a UTC day", () => {
    const reader = readerOf("iso-8601", { zone: "UTC" });
    expect(reader.time("2016-12-31T23:59:60Z")).toBe(Date.UTC(2017, 0, 1) * 1000);
    expect(reader.time("2016-12-31T23:59:60")).toBe(Date.UTC(2017, 0, 1) * 1000);
    expect(reader.leapSeconds).toBe(2);
    for (const cell of ["2016-12-31T22:59:60Z", "2016-12-31T23:58:60Z", "2016-12-31T23:59:61Z"])
      expect(reader.time(cell)).toBeNaN();
  });

  it("reads week dates", () => {
    const reader = readerOf("iso-8601", { zone: "UTC" });
    // ISO 8601:2004 4.1.4.2: 1985-W15-5 is 12 April 1985. 2020 has a week 53, 2021 has not.
    expect(reader.time("1985-W15-5")).toBe(Date.UTC(1985, 3, 12) * 1000);
    expect(reader.time("1985W155T101530Z")).toBe(Date.UTC(1985, 3, 12, 10, 15, 30) * 1000);
    expect(reader.time("2020-W53-7")).toBe(Date.UTC(2021, 0, 3) * 1000);
    expect(reader.time("2021-W53-1")).toBeNaN();
    expect(reader.time("2009-W01-1")).toBe(Date.UTC(2008, 11, 29) * 1000);
  });

  it("refuses what only looks like a time", () => {
    const reader = readerOf("iso-8601", { zone: "UTC" });
    for (const cell of [
      "",
      "2024",
      "2024-06",
      "2024-6-30",
      "24-06-30",
      "2024-06-30T",
      "2024-06-30T12",
      "2024-06-30T12:60",
      "2024-06-30T12:00:00.Z",
      "2024-06-30T12:00:00+24:00",
      "2024-06-30T12:00:00+05:3",
      "2024-06-30T12:00:00ZZ",
      "2024-06-31",
      "2024-366x",
      "2023-366",
      "2024-06-30T24:00:01",
      "2024-06-30T12:00:00 UTC",
      "1714521600",
    ])
      expect([cell, reader.time(cell)]).toEqual([cell, Number.NaN]);
  });

  it("agrees with Date for every day and offset (property)", () => {
    const reader = readerOf("iso-8601");
    fc.assert(
      fc.property(
        fc.integer({ min: -62_135_596_800_000, max: 9_007_199_254_800 }),
        fc.integer({ min: -23 * 60, max: 23 * 60 }),
        (ms, offset) => {
          const local = new Date(ms + offset * 60_000);
          if (local.getUTCFullYear() < 0) return;
          const sign = offset < 0 ? "-" : "+";
          const two = (n: number) => String(Math.floor(n)).padStart(2, "0");
          const cell = `${local.toISOString().slice(0, -1)}${sign}${two(Math.abs(offset) / 60)}:${two(Math.abs(offset) % 60)}`;
          const time = reader.time(cell);
          if (Math.abs(ms * 1000) >= 2 ** 53) expect(reader.problem).toBe("time-out-of-range");
          else expect(time).toBe(ms * 1000);
        },
      ),
      { numRuns: 2000 },
    );
  });

  it("sets times aside that float64 cannot hold to the microsecond", () => {
    const reader = readerOf("iso-8601", { zone: "UTC" });
    expect(reader.time("2255-06-05T00:00:00Z")).toBe(Date.UTC(2255, 5, 5) * 1000);
    expect(reader.time("2256-01-01T00:00:00Z")).toBeNaN();
    expect(reader.problem).toBe("time-out-of-range");
  });
});

describe("Unix times", () => {
  it("are exact to the digit in every unit (property, against BigInt)", () => {
    fc.assert(
      fc.property(
        fc.constantFrom(...(["unix-s", "unix-ms", "unix-us", "unix-ns"] as const)),
        fc.bigInt({ min: -9_007_199_254_740_990_000n, max: 9_007_199_254_740_990_000n }),
        (form, nanos) => {
          const places = { "unix-s": 9, "unix-ms": 6, "unix-us": 3, "unix-ns": 0 }[form];
          const digits = (nanos < 0n ? -nanos : nanos).toString().padStart(places + 1, "0");
          const point = digits.length - places;
          const sign = nanos < 0n ? "-" : "";
          const cell = `${sign}${digits.slice(0, point)}${places > 0 ? `.${digits.slice(point)}` : ""}`;
          let rounded = 0;
          const time = readUnixTime(cell, UNIX_UNITS[form], () => rounded++);
          expect(time).toBe(roundedMicros(nanos));
          expect(rounded).toBe(nanos % 1000n === 0n ? 0 : 1);
        },
      ),
      { numRuns: 3000 },
    );
  });

  it("are digits with at most one decimal sign, nothing else", () => {
    const read = (cell: string) => readUnixTime(cell, UNIX_UNITS["unix-s"], () => {});
    expect(read("1714521600.1")).toBe(1_714_521_600_100_000);
    expect(read("0")).toBe(0);
    expect(read("-0")).toBe(0);
    expect(read("5.")).toBe(5_000_000);
    expect(read(".5")).toBe(500_000);
    for (const cell of ["", "-", ".", "1e9", "0x10", "1_000", "12 ", "1.2.3", "NaN", "Infinity"])
      expect([cell, read(cell)]).toEqual([cell, Number.NaN]);
  });

  it("that do not fit the exact range are set aside", () => {
    const reader = readerOf("unix-s");
    expect(reader.time("1714521600000")).toBeNaN();
    expect(reader.problem).toBe("time-out-of-range");
    expect(readerOf("unix-s").time("9".repeat(400))).toBeNaN();
  });
});
