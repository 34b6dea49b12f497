import { describe, expect, it } from "vitest";
import { findTimeForm } from "../../src/logs/find-time-form.ts";
import { type ClockSettings, TimeReader } from "../../src/logs/time-reader.ts";
import { iso, readerOf, readTexts } from "./in-memory.ts";

function read(form: string, cell: string, settings: ClockSettings = { zone: "UTC" }): string | number {
  const time = readerOf(form, settings).time(cell);
  return Number.isNaN(time) ? Number.NaN : iso(time);
}

describe("Unicode date patterns", () => {
  const good: [string, string, string][] = [
    ["dd/MM/yyyy HH:mm:ss.SSS", "01/02/2024 03:04:05.678", "2024-02-01T03:04:05.678Z"],
    ["dd/MM/yyyy HH:mm:ss.SSS", "1/2/2024 3:04:05", "2024-02-01T03:04:05.000Z"],
    ["dd.MM.yyyy HH:mm:ss,SSS", "01.02.2024 03:04:05,5", "2024-02-01T03:04:05.500Z"],
    ["M/d/yyyy h:mm a", "2/1/2024 12:04 AM", "2024-02-01T00:04:00.000Z"],
    ["M/d/yyyy h:mm a", "2/1/2024 12:04 p.m.", "2024-02-01T12:04:00.000Z"],
    ["dd-MMM-yy HH:mm", "01-May-24 06:00", "2024-05-01T06:00:00.000Z"],
    ["dd-MMM-yy", "01-SEPT-71", "1971-09-01T00:00:00.000Z"],
    ["EEE MMM d HH:mm:ss yyyy", "Wed May 1 06:00:00 2024", "2024-05-01T06:00:00.000Z"],
    ["MMMM d, yyyy", "february 29, 2024", "2024-02-29T00:00:00.000Z"],
    ["yyyy DDD HHmm", "2024 060 0", "2024-02-29T00:00:00.000Z"],
    ["yyyy DDD HHmm", "2024 60 930", "2024-02-29T09:30:00.000Z"],
    ["yyyy DDD HHmm", "2024 59 2400", "2024-02-29T00:00:00.000Z"],
    ["yyyy DDD seconds-of-day", "2011 046 6250.032", "2011-02-15T01:44:10.032Z"],
    ["yyyy decimal-day", "2024 60.75", "2024-02-29T18:00:00.000Z"],
    ["yyyyMMddHHmmss", "20240229181500", "2024-02-29T18:15:00.000Z"],
    ["yyyy-MM-dd'T'HH:mm:ssXXX", "2024-02-29T18:15:00+05:30", "2024-02-29T12:45:00.000Z"],
    ["yyyy-MM-dd HH:mm:ss Z", "2024-02-29 18:15:00 +0530", "2024-02-29T12:45:00.000Z"],
    ["'on' yyyy/MM/dd 'at' HH 'o''clock'", "on 2024/02/29 at 7 o'clock", "2024-02-29T07:00:00.000Z"],
    ["dd/MM/yyyy HH:mm", "31/12/2024 24:00", "2025-01-01T00:00:00.000Z"],
    ["dd/MM/yyyy HH:mm:ss", "31/12/2016 23:59:60", "2017-01-01T00:00:00.000Z"],
  ];
  for (const [form, cell, utc] of good) it(`${form} reads ${cell}`, () => expect(read(form, cell)).toBe(utc));

  it("refuse what they do not say", () => {
    const bad: [string, string][] = [
      ["dd/MM/yyyy", "31/04/2024"],
      ["dd/MM/yyyy", "13/13/2024"],
      ["dd/MM/yyyy", "29/02/2023"],
      ["dd/MM/yyyy", "01/02/24"],
      ["dd/MM/yyyy", "01/02/2024 00:00"],
      ["dd/MM/yyyy HH:mm", "01/02/2024 24:01"],
      ["dd/MM/yyyy HH:mm", "01/02/2024 12:60"],
      ["h:mm a dd/MM/yyyy", "13:00 PM 01/02/2024"],
      ["yyyy DDD HHmm", "2023 366 0"],
      ["yyyy DDD HHmm", "2024 60 960"],
      ["dd/MMM/yyyy", "01/Mai/2024"],
      ["yyyy decimal-day", "2023 366.5"],
      ["yyyy DDD seconds-of-day", "2011 046 86400.001"],
    ];
    for (const [form, cell] of bad) expect([cell, read(form, cell)]).toEqual([cell, Number.NaN]);
  });

  it("that are mistaken say why", () => {
    const why = (form: string, settings: ClockSettings = {}) => {
      const made = TimeReader.make(form, settings);
      return made instanceof TimeReader ? "" : `${made.setting}: ${made.why}`;
    };
    expect(why("dd/mm/yyyy HH:mm")).toContain("months are MM");
    expect(why("dd/MM/yyyy HH:MM")).toContain("minutes are mm");
    expect(why("YYYY-MM-dd")).toContain("yyyy");
    expect(why("dd/MM/yyyy hh:mm")).toContain("hours to 24 are H");
    expect(why("MM/yyyy")).toContain("a month and a day");
    expect(why("dd/MM HH:mm")).toContain("year is missing");
    expect(why("QQQ yyyy")).toContain("QQQ");
    expect(why("nonsense")).not.toBe("");
    expect(why("HH:mm")).toContain("date: ");
    expect(why("elapsed-s")).toContain("start: ");
    expect(why("unix-s", { rollover: 1.5 })).toContain("rollover: ");
    expect(why("iso-8601", { zone: "Mars/Olympus" })).toContain("zone: ");
  });

  it("take two-digit years by the stated pivot", () => {
    expect(read("dd/MM/yy", "01/02/69")).toBe("2069-02-01T00:00:00.000Z");
    expect(read("dd/MM/yy", "01/02/70")).toBe("1970-02-01T00:00:00.000Z");
    expect(read("dd/MM/yy", "01/02/24", { zone: "UTC", pivot: 1920 })).toBe("1924-02-01T00:00:00.000Z");
    expect(read("dd/MM/yy", "01/02/19", { zone: "UTC", pivot: 1920 })).toBe("2019-02-01T00:00:00.000Z");
  });
});

describe("counts", () => {
  it("of elapsed time start where it is stated", () => {
    expect(read("elapsed-ms", "1500", { start: "2031-03-04T00:00:00Z" })).toBe("2031-03-04T00:00:01.500Z");
    expect(read("elapsed-s", "0.25", { start: "2031-03-04T01:00:00+01:00" })).toBe(
      "2031-03-04T00:00:00.250Z",
    );
  });
  it("that roll over are followed, late rows too", () => {
    const reader = readerOf("elapsed-us", { start: "1970-01-01T00:00:00Z", rollover: 2 ** 32 });
    const m = 2 ** 32;
    const cells = [m - 20, m - 10, 5, m - 5, 10, m - 1, m / 3, (2 * m) / 3, m - 1, 3].map((n) =>
      String(Math.floor(n)),
    );
    expect(cells.map((c) => reader.time(c))).toEqual(
      [m - 20, m - 10, m + 5, m - 5, m + 10, m - 1, m + m / 3, m + (2 * m) / 3, 2 * m - 1, 2 * m + 3].map(
        Math.floor,
      ),
    );
    const fine = readerOf("elapsed-ns", { start: "1970-01-01T00:00:00Z", rollover: 2 ** 32 });
    let last = 0;
    for (let i = 0; i < 4000; i++) last = fine.time(String((i * 2 ** 30) % 2 ** 32));
    expect(Math.abs(last - (3999 * 2 ** 30) / 1000)).toBeLessThan(1);
  });
  it("of spreadsheet days are exact where they can be", () => {
    // ISO/IEC 29500-1 18.17.4.1: serial 45413.25 is 2024-05-01 06:00 in the 1900 system.
    expect(read("serial-day-1900", "45413.25")).toBe("2024-05-01T06:00:00.000Z");
    expect(read("serial-day-1904", "43951.25")).toBe("2024-05-01T06:00:00.000Z");
    expect(read("serial-day-1900", "61")).toBe("1900-03-01T00:00:00.000Z");
    expect(read("serial-day-1900", "60")).toBeNaN();
    expect(read("serial-day-1900", "4.5e4")).toBeNaN();
  });
});

describe("times of day without a date", () => {
  it("go over midnight, and a late row does not", () => {
    const reader = readerOf("HH:mm", { zone: "UTC", date: "2024-02-28" });
    const cells = ["23:58", "23:59", "00:00", "23:59", "00:01", "12:00", "23:59", "00:00"];
    expect(cells.map((c) => iso(reader.time(c)).slice(5, 16))).toEqual([
      "02-28T23:58",
      "02-28T23:59",
      "02-29T00:00",
      "02-28T23:59",
      "02-29T00:01",
      "02-29T12:00",
      "02-29T23:59",
      "03-01T00:00",
    ]);
  });
});

describe("finding the form of times", () => {
  const find = (cells: string[]) => findTimeForm(cells, {});
  it("names what is certain", () => {
    const certain: [string[], string][] = [
      [["2024-05-01T00:00:00Z"], "iso-8601"],
      [["20240501"], "iso-8601"],
      [["1714521600"], "unix-s"],
      [["1714521600123"], "unix-ms"],
      [["1714521600123456"], "unix-us"],
      [["1714521600123456789"], "unix-ns"],
      [["20240501060000"], "yyyyMMddHHmmss"],
      [["202405010600"], "yyyyMMddHHmm"],
      [["2024/05/01 00:00:00"], "yyyy/MM/dd HH:mm:ss"],
      [["2024/05/01 00:00:00", "2024/05/01 00:00:00.1"], "yyyy/MM/dd HH:mm:ss.SSS"],
      [["01.05.2024 00:00"], "dd.MM.yyyy HH:mm"],
      [["5/13/2024 1:00 PM"], "MM/dd/yyyy h:mm a"],
      [["01-May-24 06:00"], "dd-MMM-yy HH:mm"],
      [["damaged", "13/05/2024", "14/05/2024", "15/05/2024"], "dd/MM/yyyy"],
    ];
    for (const [cells, form] of certain)
      expect([cells, find(cells)]).toEqual([cells, { kind: "found", form }]);
  });
  it("asks where it is not", () => {
    expect(find(["01/02/2024", "02/02/2024"])).toMatchObject({
      kind: "unclear",
      forms: ["dd/MM/yyyy", "MM/dd/yyyy"],
    });
    expect(find(["01/02/03"])).toMatchObject({ kind: "unclear" });
    // Month first in good order, but for one damaged cell that only day first can read.
    expect(find(["01/02/2024", "01/03/2024", "13/02/2024", "01/04/2024", "01/05/2024"])).toMatchObject({
      kind: "unclear",
    });
    expect(find(["12:30", "12:31"])).toMatchObject({ kind: "no-date", form: "HH:mm" });
    expect(find(["yesterday"])).toMatchObject({ kind: "none" });
    expect(find(["0.1", "0.2"])).toMatchObject({ kind: "none" });
    expect(find([])).toMatchObject({ kind: "none" });
  });
  it("a day after the 12th is found far below the first lines", async () => {
    const rows = (days: number) =>
      Array.from({ length: days * 288 }, (_, i) => {
        const t = new Date(Date.UTC(2024, 0, 1) + i * 300_000);
        const two = (n: number) => String(n).padStart(2, "0");
        return `${two(t.getUTCDate())}/01/2024 ${two(t.getUTCHours())}:${two(t.getUTCMinutes())},${i}\n`;
      }).join("");
    const settings = { time: { column: "time", zone: "UTC" } };
    const late = await readTexts({ log: `time,a\n${rows(13)}` }, settings);
    expect(late.accounts[0]!.found["time"]).toBe("dd/MM/yyyy HH:mm, found from the cells");
    expect(late.rows.length).toBe(13 * 288);
    const never = await readTexts({ log: `time,a\n${rows(12)}` }, settings);
    expect(never.diagnostics.map((d) => d.code)).toEqual(["date-order-unclear"]);
  });
  it("the other logs of a series help a short one", async () => {
    const { rows, accounts, diagnostics } = await readTexts(
      { a: "time,a\n01/02/2024,1\n02/02/2024,2\n", b: "time,a\n12/02/2024,3\n13/02/2024,4\n" },
      { time: { column: "time", zone: "UTC" } },
    );
    expect(diagnostics).toEqual([]);
    expect(rows.map((r) => [iso(r[0]!).slice(0, 10), r[1]])).toEqual([
      ["2024-02-01", 1],
      ["2024-02-02", 2],
      ["2024-02-12", 3],
      ["2024-02-13", 4],
    ]);
    expect(accounts[0]!.found["time"]).toBe("dd/MM/yyyy, as in the other logs of the series");
  });
});
