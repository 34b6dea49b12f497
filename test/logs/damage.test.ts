/**
 * Damaged bytes: whatever a log holds, reading it ends, the books close, and times ascend. LOG_DAMAGE_RUNS sets
 * how many damaged logs are tried; the seed is printed by fast-check when one fails.
 */
import { readdirSync, readFileSync } from "node:fs";
import { gzipSync } from "node:zlib";
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import type { TimeSettings } from "../../src/logs/rows.ts";
import { imbalance, readTexts } from "./in-memory.ts";

const RUNS = Number(process.env["LOG_DAMAGE_RUNS"] ?? 700);
const folder = new URL("./ugly/", import.meta.url);
const logs = readdirSync(folder)
  .filter((file) => file.endsWith(".csv") && file !== "empty.csv")
  .map((file) => readFileSync(new URL(file, folder)));

const PIECES = [
  '"',
  '""',
  ",",
  ";",
  "\t",
  "\n",
  "\r",
  "\r\n",
  "#",
  "\0",
  "\u{FEFF}",
  "time,temp_c\n",
  "1e309",
  "-",
  ".",
  "2099-01-01T00:00:00Z",
  "Z",
  "+14:00",
  "60",
  "24:00",
  " ",
  "é",
  "\xff",
  "\x1f\x8b",
];

interface Damage {
  readonly at: number;
  readonly kind: "cut" | "insert" | "flip" | "repeat" | "drop";
  readonly with: number;
}
const damage: fc.Arbitrary<Damage> = fc.record({
  at: fc.double({ min: 0, max: 1, noNaN: true }),
  kind: fc.constantFrom("cut", "insert", "flip", "repeat", "drop"),
  with: fc.nat(65_535),
});

function damaged(log: Buffer, list: readonly Damage[]): Buffer {
  let bytes = log;
  for (const { at, kind, with: value } of list) {
    const place = Math.floor(at * bytes.length);
    const [head, tail] = [bytes.subarray(0, place), bytes.subarray(place)];
    if (kind === "cut") bytes = value % 8 === 0 ? head : bytes;
    else if (kind === "insert")
      bytes = Buffer.concat([head, Buffer.from(PIECES[value % PIECES.length]!, "latin1"), tail]);
    else if (kind === "repeat") bytes = Buffer.concat([head, tail.subarray(0, value % 300), tail]);
    else if (kind === "drop") bytes = Buffer.concat([head, tail.subarray(value % 40)]);
    else if (tail.length > 0) {
      bytes = Buffer.from(bytes);
      bytes[place] = value & 255;
    }
  }
  return bytes;
}

const times: TimeSettings[] = [
  { column: "time" },
  { column: "time", zone: "UTC" },
  { column: "time", zone: "America/St_Johns" },
  { column: "time", form: "iso-8601", zone: "UTC" },
  { column: "ts" },
  { column: "ts", form: "unix-ms" },
  { column: "local_time", zone: "Europe/Berlin" },
  { column: ["Date", "Time"], zone: "+01:00" },
  { column: "clock", zone: "UTC", date: "2024-02-29" },
  { column: ["year", "doy", "hhmm"], form: "yyyy DDD HHmm", zone: "UTC" },
];

describe("damaged logs (property)", () => {
  it(
    "never throw, never lose a row, never go back in time",
    async () => {
      await fc.assert(
        fc.asyncProperty(
          fc.nat(logs.length - 1),
          fc.nat(logs.length - 1),
          fc.array(damage, { minLength: 1, maxLength: 6 }),
          fc.nat(times.length - 1),
          fc.constantFrom("temp_c", "x", "level_m", "power_w"),
          fc.integer({ min: 0, max: 2 }),
          fc.boolean(),
          async (one, other, list, time, channel, late, packed) => {
            const first = damaged(logs[one]!, list);
            const texts = {
              first: packed ? damaged(gzipSync(first), list.slice(0, late)) : first,
              other: logs[other]!,
            };
            const settings = {
              time: times[time]!,
              channels: [channel],
              missing: ["NAN"],
              lateBy_us: late * 60e6,
            };
            const { rows, accounts, diagnostics } = await readTexts(texts, settings);
            let used = 0;
            for (const account of accounts) {
              expect(imbalance(account.rows)).toBe(0);
              used += account.rows.used;
            }
            expect(used).toBe(rows.length);
            for (let i = 0; i < rows.length; i++) {
              expect(Number.isSafeInteger(rows[i]![0])).toBe(true);
              if (i > 0) expect(rows[i]![0]!).toBeGreaterThan(rows[i - 1]![0]!);
              expect(Math.abs(rows[i]![1]!)).not.toBe(Number.POSITIVE_INFINITY);
            }
            for (const d of diagnostics)
              for (const text of [d.problem, d.given ?? "", d.allowed ?? ""]) {
                expect(text.length).toBeLessThan(300);
                expect(text).not.toMatch(/\p{Cc}/u);
              }
            expect(await readTexts(texts, settings, 13)).toEqual({ rows, accounts, diagnostics });
          },
        ),
        { numRuns: RUNS },
      );
    },
    60_000 + 20 * RUNS,
  );

  it("random bytes are refused or read, in bounded time", async () => {
    await fc.assert(
      fc.asyncProperty(fc.uint8Array({ maxLength: 3000 }), async (bytes) => {
        const { rows } = await readTexts({
          log: bytes,
          named: Buffer.concat([Buffer.from("time,a\n"), bytes]),
        });
        expect(rows.length).toBe(0);
      }),
      { numRuns: 300 },
    );
  });
});

describe("where and when", () => {
  it("makes no difference: the same rows under any time zone of the machine", async () => {
    const before = process.env["TZ"];
    const results = [];
    try {
      for (const zone of ["UTC", "Pacific/Auckland", "America/St_Johns"]) {
        process.env["TZ"] = zone;
        const read = [];
        for (const time of times)
          for (const log of logs.slice(0, 40))
            read.push(await readTexts({ log }, { time, channels: ["temp_c"] }));
        results.push(read);
      }
    } finally {
      if (before === undefined) delete process.env["TZ"];
      else process.env["TZ"] = before;
    }
    expect(results[1]).toEqual(results[0]);
    expect(results[2]).toEqual(results[0]);
  });
});
