import { describe, expect, it } from "vitest";
import { asideOf, readTexts } from "./in-memory.ts";

const T = (s: number): string => `2031-03-04T00:00:0${s}Z`;
const values = async (log: string | Uint8Array, settings: Parameters<typeof readTexts>[1] = {}) => {
  const { rows, accounts, diagnostics } = await readTexts({ log }, settings);
  return {
    rows: rows.map((r) => r.slice(1)),
    aside: asideOf(accounts[0]!.rows),
    found: accounts[0]!.found,
    codes: diagnostics.map((d) => d.code),
  };
};

describe("names that change on the way", () => {
  it("are followed by name", async () => {
    const log = `time,a,b\n${T(0)},1,2\ntime,b,c,a\n${T(1)},4,9,3\ntime,a,b\n${T(2)},5,6\n`;
    const { rows, aside, found } = await values(log, { channels: ["a", "b"] });
    expect(rows).toEqual([
      [1, 2],
      [3, 4],
      [5, 6],
    ]);
    expect(aside).toEqual({ "repeated-names": [3, 5] });
    expect(found["names that changed on the way"]).toBe("1 (line 3); the columns were found again by name");
  });
  it("and leave out a column that is asked for, set the rows aside until it comes back", async () => {
    const log = `time,a,b\n${T(0)},1,2\ntime,a\n${T(1)},3\n${T(2)},4\ntime,b,a\n${T(3)},6,5\n`;
    const { rows, aside } = await values(log, { channels: ["a", "b"] });
    expect(rows).toEqual([
      [1, 2],
      [5, 6],
    ]);
    expect(aside).toEqual({ "repeated-names": [3, 6], "unknown-columns": [4, 5] });
  });
});

describe("names", () => {
  it("may be the last line of a commented preamble", async () => {
    const log = `# logger 7\n# time, a\n${T(0)},1\n${T(1)},2\n`;
    const { rows, found } = await values(log);
    expect([rows, found["names line"]]).toEqual([[[1], [2]], "line 2"]);
  });
  it("may hold quoted line breaks, and stand below free text with quotes and commas", async () => {
    const log = `Read out by "M", on site\n"time","a\n(m)"\n${T(0)},1\n`;
    const { rows, found } = await values(log, { channels: ["a\n(m)"] });
    expect([rows, found["names line"]]).toEqual([[[1]], "line 2"]);
  });
  it("may be set by line, and so may the first data row", async () => {
    const log = `time,a\nold,names\ntime,a\nunits,m\n${T(0)},1\n${T(1)},2\n`;
    const { rows, found } = await values(log, { layout: { namesLine: 3, dataFromLine: 6 } });
    expect([rows, found["names line"]]).toEqual([[[2]], "line 3, as set in the pipeline"]);
  });
  it("a damaged first row is not taken for a row of units", async () => {
    const { aside, found } = await values(`time,a\nxx,1.5\nyy,m\n${T(0)},1\n`);
    expect(aside).toEqual({ "unreadable-time": [2, 3] });
    expect(found["rows between names and data"]).toBeUndefined();
  });
});

describe("encodings", () => {
  const log = `time,höhe\r\n${T(0)},1\r\n${T(1)},2\r\n`;
  it("are found from a byte order mark or from zero bytes, or set", async () => {
    const le = Buffer.from(log, "utf16le");
    const be = Buffer.from(le).swap16();
    for (const bytes of [
      le,
      be,
      Buffer.concat([Buffer.from([0xff, 0xfe]), le]),
      Buffer.concat([Buffer.from([0xfe, 0xff]), be]),
    ])
      for (const chunk of [1, 3, 65_536]) {
        const { rows } = await readTexts({ log: bytes }, { channels: ["höhe"] }, chunk);
        expect(rows.map((r) => r[1])).toEqual([1, 2]);
      }
    const latin = Buffer.from(log, "latin1");
    expect((await values(latin, { channels: ["höhe"] })).rows).toEqual([[1], [2]]);
    expect((await values(latin, { channels: ["höhe"], layout: { encoding: "iso-8859-1" } })).rows).toEqual([
      [1],
      [2],
    ]);
    expect((await values(log, { layout: { encoding: "klingon" } })).codes).toEqual(["encoding-unknown"]);
  });
});

describe("numbers", () => {
  const semicolons = (...cells: string[]): string =>
    `time;a\n${cells.map((cell, i) => `${T(i)};${cell}\n`).join("")}`;
  it("with a comma are read as the cells prove, or the sign is asked for", async () => {
    expect((await values(semicolons("1,5", "1.234,5", "1.234"))).rows).toEqual([[1.5], [1234.5], [1234]]);
    expect((await values(semicolons("1.5", "1,234.5", "1,234"))).rows).toEqual([[1.5], [1234.5], [1234]]);
    expect((await values(semicolons("1'234,5", "1'234'567"))).rows).toEqual([[1234.5], [1_234_567]]);
    expect((await values(semicolons("0,125", "1,234"))).rows).toEqual([[0.125], [1.234]]);
    expect((await values(semicolons("1,234", "2,345"))).codes).toEqual(["decimal-sign-unclear"]);
    expect((await values(semicolons("1,25", "2.5"))).codes).toEqual(["decimal-sign-unclear"]);
    const set = { layout: { decimalSign: "," as const } };
    expect((await values(semicolons("1,234", "2,345"), set)).rows).toEqual([[1.234], [2.345]]);
    const both = { layout: { decimalSign: "." as const, thousandsSign: "," } };
    expect((await values(semicolons("1,234", "2,345"), both)).rows).toEqual([[1234], [2345]]);
  });
  it("with one constant unit lose it; with another one they are no numbers", async () => {
    const mixed = await values(semicolons("1.5 m3/s", "2.5 m3/s", "-9999", "3.5 m3/s"), {
      missing: ["-9999"],
    });
    expect(mixed.rows).toEqual([[1.5], [2.5], [Number.NaN], [3.5]]);
    expect(mixed.found["unit in the cells of a"]).toBe("m3/s");
    // Changing units cannot be one unit: nothing is taken off, nothing is read.
    expect((await values(semicolons("1 V", "2 V", "3 mV", "4"))).aside).toEqual({
      "no-readable-value": [2, 3, 4],
    });
    const later = Array.from(
      { length: 300 },
      (_, i) =>
        `2031-03-04T00:${String(10 + Math.floor(i / 60))}:${String(i % 60).padStart(2, "0")}Z;${i} V\n`,
    );
    later[290] = later[290]!.replace(" V", " mV");
    later[291] = later[291]!.replace(" V", "");
    const { rows, aside } = await values(`time;a\n${later.join("")}`);
    expect([rows.length, aside]).toEqual([298, { "no-readable-value": [292, 293] }]);
    for (const cell of ["0x1F", "1_000", "1e", "1 2"]) {
      const trap = await values(semicolons(cell, cell, cell, "7"));
      expect([cell, trap.rows]).toEqual([cell, [[7]]]);
      expect((await values(semicolons(cell, cell, cell, cell))).codes).toEqual(["no-usable-rows"]);
    }
  });
  it("that look like missing codes are read, and named; a counter on its way is not", async () => {
    expect(await values(semicolons("1", "2", "-999.9", "-999.9"))).toMatchObject({
      rows: [[1], [2], [-999.9], [-999.9]],
      codes: ["suspect-missing-code"],
    });
    expect((await values(semicolons("9997", "9998", "9999", "10000"))).codes).toEqual([]);
    expect((await values(semicolons("-1200", "-999", "1500"))).codes).toEqual([]);
    expect((await values(semicolons("1", "-999.9"), { missing: ["-999.9"] })).codes).toEqual([]);
  });
});
