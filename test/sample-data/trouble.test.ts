import { readFileSync } from "node:fs";
import { expect, test } from "vitest";

const root = new URL("../../sample-data/", import.meta.url).pathname;
const known = JSON.parse(readFileSync(`${root}truth.json`, "utf8")).logs.trouble.lines;
const raw = readFileSync(`${root}thurnwick/trouble.csv`, "latin1");
const physical = raw.split("\n");
const line = (n: number) => physical[n - 1]!;

test("every kind of trouble stands on its line", () => {
  expect(physical.length).toBe(known.physical);
  for (const n of known.exact_duplicates) expect(line(n)).toBe(line(n - 1));
  for (const n of known.same_time_other_value) {
    expect(line(n).slice(0, 24)).toBe(line(n - 1).slice(0, 24));
    expect(line(n)).not.toBe(line(n - 1));
  }
  for (const n of [...known.late, ...known.far_too_late]) expect(line(n) < line(n - 1)).toBe(true);
  for (const n of known.missing_code_in_level) expect(line(n)).toMatch(/,(NAN|-9999|-9999\.000|-9\.999e3),/);
  for (const n of known.empty_cell) expect(line(n)).toMatch(/,,|,$/);
  for (const n of known.fills_the_line_before) expect(line(n).slice(0, 24)).toBe(line(n - 1).slice(0, 24));
  for (const n of known.blank) expect(line(n).trim()).toBe("");
  for (const n of known.too_few_cells) expect(line(n).split(",").length).toBe(2);
  for (const n of known.too_many_cells) expect(line(n).split(",").length).toBe(4);
  for (const n of known.unreadable_level) {
    const cell = line(n).split(",")[1]!;
    expect(cell).not.toMatch(/^-?\d+\.\d+$/);
    // A careless reader would get a number out of each.
    expect(Number.isNaN(Number.parseFloat(cell))).toBe(false);
  }
  for (const n of known.unreadable_time) expect(line(n)).toMatch(/^(2031-02-30T|--,|,)/);
  for (const n of known.padded) expect(line(n)).toMatch(/^ .* , .* , .* $/);
  for (const n of known.quoted) expect(line(n)).toMatch(/^"[^"]*","[^"]*","[^"]*"$/);
  expect(physical.flatMap((text, i) => (text.endsWith("\r") ? [i + 1] : []))).toEqual(known.carriage_return);
  expect(Date.parse(line(55).slice(0, 24)) - Date.parse(line(54).slice(0, 24))).toBe(11_000);
  expect(raw.endsWith("Z,6.0")).toBe(true);
});
