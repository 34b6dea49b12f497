import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { type Diagnostic, DiagnosticError } from "../../src/diagnostics.ts";
import { readPipeline } from "../../src/pipeline/load.ts";
import { FAKE_STAGES } from "./fake-stages.ts";
import { GOOD } from "./good-file.ts";

const LINES = (text: string) => text.split(/\r\n?|\n/).length;

/** Whatever the text, it is a pipeline or it is told what is wrong, inside the file; nothing else is thrown. */
function survives(text: string): void {
  let found: readonly Diagnostic[] = [];
  try {
    readPipeline(text, "p.yaml", FAKE_STAGES);
    return;
  } catch (error) {
    if (!(error instanceof DiagnosticError)) throw error;
    found = error.diagnostics;
  }
  expect(found.length).toBeGreaterThan(0);
  for (const d of found) {
    expect(d.code).toMatch(/^[a-z0-9-]+$/);
    expect(d.line).toBeGreaterThanOrEqual(1);
    expect(d.line).toBeLessThanOrEqual(LINES(text) + 1);
    expect(d.column).toBeGreaterThanOrEqual(1);
    expect(d.problem.length).toBeGreaterThan(0);
    expect(`${d.problem}${d.given}${d.todo}`).not.toMatch(/undefined|\[object/);
    expect(d.given?.length ?? 0).toBeLessThan(200);
  }
}

/** Scraps that a slip of the hand leaves in a pipeline file. */
const SCRAPS = [
  ...[
    "\n",
    " ",
    "\t",
    ":",
    ": ",
    "- ",
    "[",
    "]",
    "{",
    "}",
    "*a",
    "&a ",
    "!x ",
    '"',
    "'",
    "#",
    "|",
    ">",
    "%",
    "@",
    "?",
  ],
  ...[
    "~",
    "null",
    "true",
    ".inf",
    ".nan",
    "0x10",
    "1e999",
    "-0",
    "10 s",
    "1/0 s",
    "__proto__",
    "stage: cut",
    "<<: *a",
  ],
  ...["---\n", "...\n", "\u0085", "\u2028", "\ufeff", "\ud800", "é", "μ", "\u{1f300}"],
];

describe("no text crashes the loader", () => {
  test("any text", () => {
    fc.assert(
      fc.property(
        fc.oneof(fc.string({ unit: "binary", maxLength: 200 }), fc.string({ maxLength: 200 })),
        survives,
      ),
      { numRuns: 800 },
    );
  });

  test("scraps of YAML", () => {
    fc.assert(
      fc.property(fc.array(fc.constantFrom(...SCRAPS), { maxLength: 40 }), (scraps) =>
        survives(scraps.join("")),
      ),
      { numRuns: 800 },
    );
  });

  test("a good file with scraps written over it", () => {
    const slip = fc.record({
      at: fc.nat(GOOD.length),
      cut: fc.nat(12),
      put: fc.oneof(fc.constantFrom(...SCRAPS), fc.string({ maxLength: 5 })),
    });
    fc.assert(
      fc.property(fc.array(slip, { minLength: 1, maxLength: 4 }), (slips) => {
        let text = GOOD;
        for (const { at, cut, put } of slips) text = text.slice(0, at) + put + text.slice(at + cut);
        survives(text);
      }),
      { numRuns: 400 },
    );
  });

  test("any data in the place of any value", () => {
    const start = readPipeline(GOOD, "p.yaml", FAKE_STAGES).document.data;
    fc.assert(
      fc.property(fc.jsonValue({ maxDepth: 3 }), fc.nat(200), (value, which) => {
        let n = 0;
        const swap = (x: unknown): unknown => {
          if (n++ === which) return value;
          if (Array.isArray(x)) return x.map(swap);
          if (x !== null && typeof x === "object")
            return Object.fromEntries(Object.entries(x).map(([k, v]) => [k, swap(v)]));
          return x;
        };
        survives(JSON.stringify(swap(start), null, 1));
      }),
      { numRuns: 800 },
    );
  });
});

describe("no text keeps the loader long", () => {
  const LENGTH = 100_000;
  const repeat = (unit: string) => unit.repeat(Math.floor(LENGTH / unit.length));
  test.each([
    ["keys", Array.from({ length: 20_000 }, (_, i) => `key${i}: 1`).join("\n")],
    ["the same key", repeat("a: 1\n")],
    ["brackets", repeat("[")],
    ["closing brackets", repeat("]")],
    ["dashes", repeat("- ")],
    ["colons", repeat("a: b: c\n")],
    ["quotes", repeat('"')],
    ["one line", repeat("x")],
    ["list entries", GOOD.replace("weights: [1, 2.5, 1]", `weights: [${"x,".repeat(30_000)}]`)],
    ["stages", GOOD.replace("requirements:", `${"  - stage: smoth\n".repeat(10_000)}requirements:`)],
    ["channels", GOOD.replace("channels: [level]", `channels: [${"levl, ".repeat(20_000)}]`)],
    [
      "aliases",
      `x0: &x0 1\n${Array.from({ length: 10_000 }, (_, i) => `x${i + 1}: &x${i + 1} [*x${i}]`).join("\n")}`,
    ],
    ["a circle", `x: &x [*x, *x, *x]\n${GOOD}`],
    [
      "exponents",
      GOOD.replace("1/4 s", `1e${"9".repeat(1000)} s`).replace("80 %", `${"1".repeat(100_000)} %`),
    ],
    ["blanks in a quantity", GOOD.replace("1/4 s", `"1${" ".repeat(100_000)}x"`)],
    [
      "digits in a quantity",
      GOOD.replace("1/4 s", `"${"1".repeat(100_000)}x"`).replace("0.5 m/s", `"1${"/".repeat(50_000)}"`),
    ],
    ["a long name", GOOD.replace("sump-level", `"${" -".repeat(50_000)}"`)],
  ])("%s", (_name, text) => {
    const before = performance.now();
    survives(text.slice(0, 999_999));
    expect(performance.now() - before).toBeLessThan(5000);
  });
});
