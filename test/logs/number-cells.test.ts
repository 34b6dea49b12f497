import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { MissingCodes } from "../../src/logs/missing-codes.ts";
import { readNumber } from "../../src/logs/number-cell.ts";

describe("number cells", () => {
  it("reads the spellings that loggers use", () => {
    const cells = [
      "1.5E+03",
      "-2e-4",
      "+3.25e0",
      "1E5",
      "1d3",
      "-2.5D-02",
      ".5",
      "7.",
      "-0",
      "0012",
      "9.97e36",
      "1e308",
    ];
    const values = [1500, -0.0002, 3.25, 100_000, 1000, -0.025, 0.5, 7, -0, 12, 9.97e36, 1e308];
    expect(cells.map((cell) => readNumber(cell, "."))).toEqual(values);
  });

  it("does not take for numbers what only a programming language does", () => {
    for (const cell of [
      "",
      " ",
      "0x1F",
      "0b1",
      "0o7",
      "12abc",
      "1_000",
      "true",
      "1 000",
      "1e",
      "1e+",
      "e5",
      ".",
      "+",
      "-",
      "+-1",
      "--1",
      "Infinity",
      "-Infinity",
      "Inf",
      "NaN",
      "1e309",
      "-1e309",

      "1.2.3",
      "1,5",
      "5n",
      "1d",
      "d5",
      "١٢",
      "1e5.0",
      "1\t",
    ])
      expect([cell, readNumber(cell, ".")]).toEqual([cell, Number.NaN]);
  });

  it("reads a decimal comma where it is the decimal sign, and then no point", () => {
    expect(readNumber("20,05", ",")).toBe(20.05);
    expect(readNumber("-,5e1", ",")).toBe(-5);
    expect(readNumber("20.05", ",")).toBeNaN();
    expect(readNumber("1,2,3", ",")).toBeNaN();
  });

  it("gives back every float64 (property)", () => {
    fc.assert(
      fc.property(fc.double({ noNaN: true, noDefaultInfinity: true }), (value) => {
        // String() writes negative zero without its sign, so equality of numbers is asked, not identity.
        expect(readNumber(String(value), ".") === value).toBe(true);
        expect(readNumber(value.toExponential().replace(".", ","), ",") === value).toBe(true);
      }),
    );
  });
});

describe("missing codes", () => {
  const codes = new MissingCodes(["-9999", "NAN", " over "]);
  it("match numbers in every spelling", () => {
    for (const cell of ["-9999", "-9999.00", "-9.999e3", "-09999"])
      expect(codes.isNumber(readNumber(cell, "."))).toBe(true);
    expect(codes.isNumber(-9999.1)).toBe(false);
  });
  it("match words in upper and lower case; an empty cell is always missing", () => {
    for (const word of ["NAN", "NaN", "OVER", ""]) expect(codes.isWord(word)).toBe(true);
    expect(codes.isWord("ERR")).toBe(false);
    expect(new MissingCodes([]).isWord("")).toBe(true);
  });
});
