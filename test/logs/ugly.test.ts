/**
 * Log files as loggers really make them, in ./ugly with an index of what a careful reader does with each
 * (provided with the project's brief, without a further origin). The gigantic line is made here from its digest.
 */
import { createHash } from "node:crypto";
import { readdirSync, readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import type { LogLayout, TimeSettings } from "../../src/logs/rows.ts";
import { asideOf, imbalance, iso, readTexts } from "./in-memory.ts";

interface IndexEntry {
  file: string;
  sha256: string;
  expect: {
    outcome: string;
    rowsAccepted?: number;
    rowsSetAside: { line: number }[];
    firstRow?: { time?: string; utc?: string };
    lastRow?: { time?: string; utc?: string };
  };
}
const folder = new URL("./ugly/", import.meta.url);
const index = JSON.parse(readFileSync(new URL("index.json", folder), "utf8")) as { files: IndexEntry[] };

function bytesOf(file: string): Uint8Array {
  if (file !== "gigantic-line.csv") return readFileSync(new URL(file, folder));
  return Buffer.from(
    `time,temp_c,rh_pct,note\n2024-05-01T00:00:00Z,20.00,32.52,ok\n2024-05-01T00:01:00Z,21.93,32.97,${"x".repeat(1_200_000)}\n2024-05-01T00:02:00Z,22.96,32.03,ok\n`,
  );
}

interface Try {
  readonly channels?: readonly string[];
  readonly time?: Partial<TimeSettings>;
  readonly missing?: readonly string[];
  readonly layout?: LogLayout;
  /** Reasons of the rows set aside, with their lines; the lines of the index when left out. */
  readonly aside?: Record<string, number[]>;
  readonly merged?: number;
  /** Values of all rows, or of the first ones. */
  readonly values?: readonly (readonly number[])[];
  readonly found?: Record<string, string>;
  readonly diagnostics?: readonly string[];
  /** Rows used, where one of the equally good answers of the index is given. */
  readonly rows?: number;
}

const BOTH = ["temp_c", "rh_pct"];
const utc = { zone: "UTC" };

const tries: Record<string, Try> = {
  "bom-crlf.csv": {
    channels: BOTH,
    values: [[20, 32.52]],
    found: { encoding: "UTF-8 with byte order mark", "line ends": "CR LF" },
  },
  "utf16le-bom-tab.csv": { channels: BOTH, values: [[20, 32.52]], found: { separator: "tab" } },
  "latin1-degree.csv": {
    channels: ["temp (°C)"],
    values: [[20], [21.93], [22.96], [22.59], [21], [18.95]],
    found: {
      "lines that are not valid UTF-8": "6 (first lines 2, 3, 4, 5, 6); read as Windows-1252 (Latin-1)",
    },
  },
  "semicolon-decimal-comma.csv": {
    channels: ["Temp", "Feuchte"],
    time: { column: "Zeit", ...utc },
    values: [
      [20, 32.52],
      [21.93, 32.97],
    ],
    found: {
      separator: "semicolon",
      "decimal sign": "comma",
      time: "dd.MM.yyyy HH:mm:ss, found from the cells",
    },
  },
  "whitespace-padded.csv": { channels: BOTH, values: [[20, 32.52]] },
  "preamble-units-row.csv": {
    channels: ["supply", "air"],
    time: { column: "when", ...utc },
    missing: ["NAN"],
    found: { "names line": "line 2", "rows between names and data": "3, 4 (units or notes)" },
  },
  "comment-preamble.csv": {
    channels: BOTH,
    found: { "comment lines": "4 (lines 1, 2, 3, 14)", "names line": "line 5" },
  },
  "trailing-commas.csv": { channels: BOTH },
  "ragged-rows.csv": { channels: BOTH, aside: { ragged: [4, 6, 10] } },
  "truncated-last-line.csv": { channels: BOTH, aside: { "cut-short": [12] } },
  "header-repeated.csv": { channels: BOTH, aside: { "repeated-names": [7, 13] } },
  "no-header.csv": { channels: BOTH, rows: 0, diagnostics: ["time-column-missing"] },
  "time-in-third-column.csv": { time: { column: "when" }, channels: ["temp_c"] },
  "all-quoted-notes.csv": { channels: ["temp_c"], values: [[20], [21.93], [22.96], [22.59], [21], [18.95]] },
  "mixed-line-ends.csv": { channels: BOTH, found: { "line ends": "mixed: LF, CR LF, CR" } },
  "nul-bytes.csv": { channels: BOTH, aside: { "nul-bytes": [8] } },
  "binary-junk.csv": { rows: 0, diagnostics: ["log-not-text"] },
  // Unpacking it is equally right.
  "gzip-inside.csv": { channels: BOTH, rows: 10, found: { compression: "gzip" } },
  // A limit on the length of a line applies, and is said.
  "gigantic-line.csv": { channels: BOTH, rows: 2, aside: { "line-too-long": [3] } },
  "empty.csv": { rows: 0, diagnostics: ["log-empty"] },
  "header-only.csv": { channels: BOTH, rows: 0, diagnostics: ["log-without-rows"] },
  "one-row.csv": { channels: BOTH },
  // The repeat is merged, so only the contradiction is set aside.
  "duplicate-timestamps.csv": { channels: BOTH, merged: 1, aside: { "conflicting-time": [10] } },
  "out-of-order.csv": { channels: BOTH, found: { "backward steps of the clock": "2 (lines 6, 11)" } },
  "dst-end-local.csv": {
    channels: ["level_m"],
    time: { column: "local_time", zone: "Europe/Berlin" },
    found: { "rows in a repeated hour, by their order": "4 in the first pass, 4 in the second" },
  },
  "midnight-rollover.csv": { time: { column: "clock", date: "2024-05-01", ...utc }, channels: ["temp_c"] },
  "clock-reset.csv": { channels: BOTH, aside: { "stray-time": [7, 8, 9] } },
  "far-future-row.csv": { channels: BOTH, aside: { "stray-time": [8] } },
  "offset-changes.csv": { channels: ["temp_c"] },
  "epoch-seconds.csv": {
    time: { column: "ts" },
    channels: ["temp_c"],
    found: { time: "unix-s, found from the cells" },
  },
  "epoch-ms.csv": {
    time: { column: "ts" },
    channels: ["temp_c"],
    found: { time: "unix-ms, found from the cells" },
  },
  "epoch-ns.csv": {
    time: { column: "ts" },
    channels: ["acc"],
    found: { time: "unix-ns, found from the cells", "times rounded to the microsecond": "1" },
  },
  "epoch-fractional.csv": {
    time: { column: "ts" },
    channels: ["x"],
    found: { time: "unix-s, found from the cells" },
  },
  "split-date-time.csv": { time: { column: ["Date", "Time"], ...utc }, channels: ["temp_c"] },
  "day-of-year.csv": {
    time: { column: ["year", "doy", "hhmm"], form: "yyyy DDD HHmm", ...utc },
    channels: ["temp_c"],
  },
  "two-digit-year.csv": { time: utc, channels: ["x"], found: { "two-digit years": "1970 to 2069" } },
  "ambiguous-dmy-mdy.csv": { time: utc, channels: ["x"], rows: 0, diagnostics: ["date-order-unclear"] },
  "dmy-resolved-late.csv": {
    time: utc,
    channels: ["x"],
    found: { time: "dd/MM/yyyy, found from the cells" },
  },
  "sentinels.csv": {
    channels: ["a", "b", "c", "d"],
    missing: ["NAN", "OVER", "####", "N/A", "null", "-"],
    diagnostics: ["suspect-missing-code", "suspect-missing-code"],
  },
  // Fortran's exponent is read, so line 10 is a number.
  "scientific.csv": {
    channels: ["x"],
    rows: 9,
    aside: {},
    values: [[1500], [-0.0002], [3.25], [100_000], [0.5], [7], [-0], [12], [1000]],
  },
  "inf-huge.csv": {
    channels: ["x"],
    aside: { "no-readable-value": [4, 5, 6, 8] },
    values: [[1], [2], [1e308], [9.97e36], [3], [4]],
    diagnostics: ["suspect-missing-code"],
  },
  "thousands-separators.csv": {
    channels: ["power_w"],
    aside: { "no-readable-value": [6] },
    values: [[1234.5], [12_345], [1_234_567.8], [999]],
    found: { "thousands sign": "comma", "decimal sign": "point" },
  },
  "unit-suffix.csv": {
    channels: ["temp", "rh", "batt"],
    values: [[20, 32.52, 3.6]],
    found: {
      "unit in the cells of temp": "°C",
      "unit in the cells of rh": "%",
      "unit in the cells of batt": "V",
    },
  },
  "constant-channel.csv": { channels: ["stuck", "live"] },
};

describe("ugly logs", () => {
  it("are all tried", () => {
    expect(Object.keys(tries).sort()).toEqual(index.files.map((f) => f.file).sort());
    const copied = readdirSync(folder).filter((f) => f !== "index.json");
    expect([...copied, "gigantic-line.csv"].sort()).toEqual(index.files.map((f) => f.file).sort());
  });

  for (const { file, sha256, expect: wanted } of index.files) {
    it(file, async () => {
      const bytes = bytesOf(file);
      expect(createHash("sha256").update(bytes).digest("hex")).toBe(sha256);
      const one = tries[file]!;
      const request = {
        time: { column: "time", ...one.time },
        channels: one.channels ?? ["temp_c"],
        missing: one.missing ?? [],
        layout: one.layout ?? {},
      };
      const { rows, accounts, diagnostics } = await readTexts({ [file]: bytes }, request);
      expect(rows.length).toBe(one.rows ?? wanted.rowsAccepted);
      expect(diagnostics.map((d) => d.code)).toEqual(one.diagnostics ?? []);
      const { rows: account, found, sha256: digest } = accounts[0]!;
      expect(digest).toBe(sha256);
      expect(imbalance(account)).toBe(0);
      expect(account.merged).toBe(one.merged ?? 0);
      if (one.aside !== undefined) expect(asideOf(account)).toEqual(one.aside);
      else if (one.rows === undefined)
        expect(Object.values(asideOf(account)).flat()).toEqual(wanted.rowsSetAside.map((r) => r.line));
      expect(found).toMatchObject(one.found ?? {});
      if (one.values !== undefined)
        expect(rows.slice(0, one.values.length).map((r) => r.slice(1))).toEqual(one.values);
      const asTime = (row: { time?: string; utc?: string }): string => row.utc ?? row.time!;
      const isoUtc = (text: string): number =>
        Date.parse(/Z$/.test(text) ? text : text.length > 10 ? `${text}Z` : text);
      if (
        rows.length > 0 &&
        wanted.firstRow !== undefined &&
        (wanted.firstRow.time ?? wanted.firstRow.utc) !== undefined
      )
        expect(rows[0]![0]! / 1000).toBe(isoUtc(asTime(wanted.firstRow)));
      if (rows.length > 0 && wanted.lastRow !== undefined)
        expect(Math.round(rows.at(-1)![0]! / 100)).toBe(
          Math.round(
            isoUtc(asTime(wanted.lastRow)) * 10 + (asTime(wanted.lastRow).includes("0.0175") ? 5 : 0),
          ),
        );
      for (const chunk of [1, 7, 1000]) {
        if (bytes.length > 10_000) break;
        expect(await readTexts({ [file]: bytes }, request, chunk)).toEqual({ rows, accounts, diagnostics });
      }
      // A second log beside it is read whatever this one is.
      const good = "time,temp_c\n2031-03-04T00:00:00Z,1\n";
      const beside = await readTexts(
        { [file]: bytes, good },
        { ...request, time: { column: "time" }, channels: ["temp_c"] },
      );
      expect(iso(beside.rows.at(-1)![0]!)).toBe("2031-03-04T00:00:00.000Z");
    });
  }

  it("counts of missing cells are those of the index", async () => {
    const { accounts } = await readTexts(
      { log: bytesOf("sentinels.csv") },
      {
        channels: ["a", "b", "c", "d"],
        missing: ["NAN", "OVER", "####", "N/A", "null", "-", "-9999", "-7999"],
      },
    );
    expect(accounts[0]!.rows.missingCells).toEqual([2, 3, 3, 3]);
  });

  it("what is asked, is asked by name", async () => {
    const asked = async (file: string, time: TimeSettings, channels: string[]) => {
      const { diagnostics } = await readTexts({ log: bytesOf(file) }, { time, channels });
      return diagnostics.map((d) => [d.code, d.todo]);
    };
    expect(await asked("midnight-rollover.csv", { column: "clock", zone: "UTC" }, ["temp_c"])).toEqual([
      ["time-date-needed", "set time: date in the pipeline"],
    ]);
    expect(await asked("dst-end-local.csv", { column: "local_time" }, ["level_m"])).toEqual([
      ["zone-needed", "add time: zone to the pipeline"],
    ]);
    expect(await asked("ambiguous-dmy-mdy.csv", { column: "time", zone: "UTC" }, ["x"])).toEqual([
      ["date-order-unclear", "set time: form in the pipeline to the one that is meant"],
    ]);
    expect(
      await asked("ambiguous-dmy-mdy.csv", { column: "time", form: "MM/dd/yyyy HH:mm", zone: "UTC" }, ["x"]),
    ).toEqual([]);
  });
});
