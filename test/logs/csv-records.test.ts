import { readFileSync } from "node:fs";
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { type Cells, cellsOf } from "../../src/logs/cells.ts";
import { RecordSplitter } from "../../src/logs/record-splitter.ts";
import { Utf8Stream } from "../../src/logs/text-decoding.ts";

interface Record_ {
  line: number;
  cells: Cells;
}

function split(
  bytes: Uint8Array,
  chunk: number,
): { records: Record_[]; refused: [number, string][]; cut: boolean } {
  const refused: [number, string][] = [];
  const records: Record_[] = [];
  let cut = false;
  const splitter = new RecordSplitter({
    separator: ",",
    comments: true,
    fromLine: 1,
    onRefused: (line, reason) => refused.push([line, reason]),
    onComment: () => {},
  });
  const decoder = new Utf8Stream("utf-8");
  const take = (batch: ReturnType<RecordSplitter["end"]>): void => {
    if (batch === null) return;
    cellsOf(batch, ",").forEach((cells, i) => {
      records.push({ line: batch.lines[i]!, cells });
    });
    cut = batch.cut;
  };
  for (let at = 0; at < bytes.length; at += chunk)
    take(splitter.push(decoder.push(bytes.subarray(at, at + chunk))));
  take(splitter.push(decoder.end()));
  take(splitter.end());
  return { records, refused, cut };
}

const reference = JSON.parse(
  readFileSync(new URL("../reference/22-rfc4180-csv.json", import.meta.url), "utf8"),
) as { cases: { id: string; inputs: { base64: string }; expected: { rows?: string[][]; error?: string } }[] };

describe("records and cells (reference 22, RFC 4180)", () => {
  for (const { id, inputs, expected } of reference.cases) {
    for (const chunk of [1, 7, 65_536])
      it(`${id}, ${chunk} bytes at a time`, () => {
        const { records, refused } = split(Buffer.from(inputs.base64, "base64"), chunk);
        if (expected.rows === undefined) {
          expect(refused).toEqual([[2, "unclosed-quote"]]);
          expect(records.map((r) => r.cells)).toEqual([
            ["a", "b"],
            ["3", "4"],
          ]);
        } else {
          // Cells of a log are trimmed of the blanks around them; RFC 4180 itself keeps those.
          const trimmed = expected.rows.map((row) => row.map((cell) => cell.trim()));
          expect(records.map((r) => r.cells)).toEqual(trimmed);
        }
      });
  }
});

describe("physical lines", () => {
  it("count quoted line breaks, blank lines, comments and lone CR", () => {
    const text = 'a,b\r\n\r\n# note "x\n1,"two\r\nlines"\r\n2,x\r3,y\n\n4,"p\rq\ns"\n5,z\n';
    for (const chunk of [1, 2, 3, 7, 1000]) {
      const { records, refused } = split(Buffer.from(text), chunk);
      expect(records.map((r) => r.line)).toEqual([1, 4, 6, 7, 9, 12]);
      expect(records.map((r) => r.cells![0])).toEqual(["a", "1", "2", "3", "4", "5"]);
      expect(refused).toEqual([]);
    }
  });

  it("say where a row that cannot be read began, and lose only that", () => {
    const rows = Array.from({ length: 3000 }, (_, i) => `${i},row number ${i}`);
    rows[10] = '10,"never closed';
    rows[20] = "20,\0\0\0";
    rows[30] = `30,${"x".repeat(1_300_000)}`;
    rows[40] = '40,6" pipe';
    rows[50] = '50,"bad" quote" here';
    for (const chunk of [977, 65_536]) {
      const { records, refused } = split(Buffer.from(`${rows.join("\n")}\n`), chunk);
      expect(refused).toEqual([
        [11, "unclosed-quote"],
        [21, "nul-bytes"],
        [31, "line-too-long"],
      ]);
      expect(records.length).toBe(2997);
      expect(records.filter((r) => r.cells === null).map((r) => r.line)).toEqual([51]);
      expect(records.find((r) => r.line === 41)!.cells).toEqual(["40", '6" pipe']);
      expect(records.at(-1)).toEqual({ line: 3000, cells: ["2999", "row number 2999"] });
    }
  });

  it("an over-long line does not stay in memory", () => {
    const splitter = new RecordSplitter({
      separator: ",",
      comments: true,
      fromLine: 1,
      onRefused: () => {},
      onComment: () => {},
    });
    const chunk = Buffer.alloc(1 << 20, "x");
    const before = process.memoryUsage().arrayBuffers;
    for (let i = 0; i < 200; i++) splitter.push(chunk);
    expect(process.memoryUsage().arrayBuffers - before).toBeLessThan(16 << 20);
  });

  it("do not depend on how the bytes come (property, against a plain parser)", () => {
    const cell = fc.stringMatching(/^[a-z0-9 "\n\r]{0,6}$/);
    fc.assert(
      fc.property(
        fc.array(fc.array(cell, { minLength: 2, maxLength: 3 }), { maxLength: 20 }),
        fc.constantFrom("\n", "\r\n", "\r"),
        fc.integer({ min: 1, max: 40 }),
        (rows, end, chunk) => {
          const text = rows
            .map((row) => row.map((c) => `"${c.replaceAll('"', '""')}"`).join(",") + end)
            .join("");
          const { records } = split(Buffer.from(text), chunk);
          // In a quoted cell everything is kept, so the rows come back as they went in.
          expect(records.map((r) => r.cells)).toEqual(rows);
          let line = 1;
          rows.forEach((row, i) => {
            expect(records[i]!.line).toBe(line);
            line += (row.join("\0").match(/\r\n|\n|\r/g)?.length ?? 0) + 1;
          });
        },
      ),
      { numRuns: 300 },
    );
  });
});
