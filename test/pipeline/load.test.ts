import { mkdtempSync, readdirSync, readFileSync, rmSync, symlinkSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll, describe, expect, test } from "vitest";
import { type Diagnostic, DiagnosticError } from "../../src/diagnostics.ts";
import { loadPipeline, readPipeline } from "../../src/pipeline/load.ts";
import { FAKE_STAGES } from "./fake-stages.ts";
import { GOOD, withMistake } from "./good-file.ts";
import { MISTAKES } from "./mistakes.ts";

const SOURCES = new URL("../../src/pipeline/", import.meta.url);

function mistakesIn(text: string): readonly Diagnostic[] {
  try {
    readPipeline(text, "p.yaml", FAKE_STAGES);
    return [];
  } catch (error) {
    if (error instanceof DiagnosticError) return error.diagnostics;
    throw error;
  }
}

describe("one mistake in a good file", () => {
  test.each(MISTAKES.map((c) => [c.code, c.by.slice(0, 50), c] as const))("%s: %s", (_code, _by, c) => {
    const { text, line, column } = withMistake(c);
    const found = mistakesIn(text);
    const hit = found.find((d) => d.code === c.code && d.line === line && d.column === column);
    expect(hit, JSON.stringify({ wanted: { code: c.code, line, column }, found }, null, 1)).toBeDefined();
    expect(hit!.problem).not.toBe("");
    expect(hit!.allowed).toBeTruthy();
    expect(hit!.todo).toBeTruthy();
    if (c.says !== undefined)
      expect(`${hit!.problem}; ${hit!.given}; ${hit!.allowed}; ${hit!.todo}`).toContain(c.says);
  });
});

describe("a good file", () => {
  const { pipeline, document } = readPipeline(GOOD, "p.yaml", FAKE_STAGES);

  test("gives its settings parsed, with defaults", () => {
    expect(pipeline.name).toBe("sump-level");
    expect(pipeline.logs.files).toEqual(["../logs/{logger}/level-{date}.csv"]);
    expect(pipeline.logs.missing).toEqual(["NAN", "-9999", "-7"]);
    expect(pipeline.logs["late-by"].seconds).toBe(60);
    expect(pipeline.channels).toEqual([
      { name: "level", column: "LEVEL_M", unit: "m" },
      { name: "inflow", column: "Q_IN", unit: "m3/s" },
    ]);
    expect(pipeline.chain.map(({ stage, index, channels }) => ({ stage, index, channels }))).toEqual([
      { stage: "even", index: 0, channels: undefined },
      { stage: "smooth", index: 1, channels: ["level"] },
      { stage: "cut", index: 2, channels: undefined },
      { stage: "tell", index: 3, channels: undefined },
    ]);
    expect(pipeline.chain[0]!.settings).toMatchObject({
      interval: { us: { num: 250_000, den: 1 } },
      forgive: false,
    });
    expect(pipeline.chain[2]!.settings).toMatchObject({
      pass: [{ hz: 0.002 }, { hz: 1 / 600 }],
      floor: -80,
      to: { us: { num: 10_000, den: 1 }, seconds: 0.01 },
    });
    expect(pipeline.requirements.remove).toMatchObject([{ from: { hz: 0.1 }, attenuation: 40 }]);
    expect(pipeline.writes).toEqual({
      folder: "../cleaned/{logger}",
      split: "none",
      digits: 6,
      removed: true,
      flags: true,
      page: true,
    });
  });

  const line = (part: string) => GOOD.slice(0, GOOD.indexOf(part)).split("\n").length;
  test.each([
    [["chain", 2, "pass"], "    pass:", 11],
    [["chain", 2, "pass", 1], "    pass:", 19],
    [["chain", 2, "taps"], "- stage: cut", 5],
    [["chain", 2], "- stage: cut", 5],
    [["chain"], "chain:", 1],
    [["chain", 9, "stage"], "chain:", 1],
    [["chain", 3, "bands", "tide", "to"], "      tide:", 31],
    [["chain", 3, "bands"], "    bands:", 5],
    [["writes", "page"], "writes:", 1],
    [["requirements", "keep", 0, "ripple"], "  keep:", 43],
    [["no", "such", "thing"], "name:", 1],
  ] as const)("knows the place of %j", (path, part, column) => {
    expect(document.at(path)).toEqual({ line: line(part), column });
  });

  test("keeps the order of channels whose names look like numbers", () => {
    const text = GOOD.replace("  level: {", "  20: {")
      .replace("  inflow: {", "  3: {")
      .replace("[level]", '["3"]');
    expect(readPipeline(text, "p", FAKE_STAGES).pipeline.channels.map((c) => c.name)).toEqual(["20", "3"]);
  });

  test("may repeat a part by its name, and is found where it stands", () => {
    const text = GOOD.replace("keep: [{ from: 0 Hz", "keep: [&low { from: 0 Hz").replace(
      "remove:\n",
      "remove:\n    - <<: *low\n",
    );
    expect(mistakesIn(text).map((d) => d.code)).toContain("unknown-key");
    const plain = GOOD.replace("tide: { from", "tide: &t { from").replace(
      "0.1 mHz }\n",
      "0.1 mHz }\n      ebb: *t\n",
    );
    const read = readPipeline(plain, "p", FAKE_STAGES);
    expect(read.document.at(["chain", 3, "bands", "ebb"])).toEqual({
      line: line("      tide:") + 1,
      column: 12,
    });
    expect(read.document.at(["chain", 3, "bands", "ebb", "to"]).line).toBe(line("      tide:"));
  });

  test("may come with Windows line ends and a byte order mark", () => {
    expect(readPipeline(GOOD.replaceAll("\n", "\r\n"), "p", FAKE_STAGES).pipeline).toEqual(pipeline);
  });

  test("may be JSON", () => {
    expect(readPipeline(JSON.stringify(asData(document.data)), "p", FAKE_STAGES).pipeline).toEqual(pipeline);
  });
});

const asData = (data: unknown): unknown => JSON.parse(JSON.stringify(data));

describe("several mistakes", () => {
  test("are all told at once, in the order of the file", () => {
    let text = GOOD;
    for (const [from, to] of [
      ["name: sump-level", "name: a/b"],
      ["form: iso-8601", "from: iso-8601"],
      ["unit: m }", "unit: }"],
      ["points: 5", "points: 5.5\n    points: 6"],
      ["stage: cut", "stage: cot"],
      ["channels: [level]", "channels: [lvel, inflow, inflow]"],
      ["digits: 6", "digits: six"],
    ] as const)
      text = text.replace(from, to);
    const found = mistakesIn(text);
    expect(found.map((d) => d.code)).toEqual([
      "bad-name",
      "unknown-key",
      "empty-value",
      "unknown-channel",
      "repeated-channel",
      "duplicate-key",
      "unknown-stage",
      "wrong-type",
    ]);
    for (const [i, d] of found.entries())
      if (i > 0) expect(d.line).toBeGreaterThanOrEqual(found[i - 1]!.line);
  });

  test("are not shown by the thousand", () => {
    const found = mistakesIn(Array.from({ length: 5000 }, (_, i) => `key${i}: 1`).join("\n"));
    expect(found).toHaveLength(101);
    expect(found.at(-1)).toMatchObject({ code: "more-mistakes" });
  });
});

describe("a file that is no pipeline", () => {
  const folder = mkdtempSync(join(tmpdir(), "forebay-load-"));
  afterAll(() => rmSync(folder, { recursive: true }));
  const write = (name: string, content: string | Uint8Array) => {
    writeFileSync(join(folder, name), content);
    return join(folder, name);
  };
  symlinkSync("loop", join(folder, "loop"));
  const latin = Buffer.concat([Buffer.from("name: a\nabout: Stra"), Buffer.from([0xdf]), Buffer.from("e\n")]);

  const cases = [
    ["cannot-read", "no such file", 0, join(folder, "none.yaml")],
    ["cannot-read", "this is a folder", 0, folder],
    ["cannot-read", "not a folder", 0, join(write("file", "x"), "x")],
    ["cannot-read", "circle", 0, join(folder, "loop")],
    ["cannot-read", "not a path", 0, "a\u0000b"],
    ["file-too-large", "log", 0, write("large", "#".repeat(1_000_001))],
    ["not-utf-8", "save it as UTF-8", 2, write("latin", latin)],
    ["not-utf-8", "UTF-16", 1, write("utf16", Buffer.from("\ufeffname: a", "utf16le"))],
    ["control-character", "character 0", 2, write("nul", "name: a\nabout: b\u0000c\n")],
    ["not-a-pipeline", "the file is empty", 1, write("empty", "")],
    ["not-a-pipeline", "the file is empty", 1, write("blank", "# nothing\n")],
    ["not-a-pipeline", "a list of 2", 1, write("list", "- a\n- b\n")],
    ["not-a-pipeline", "time,level", 1, write("log", "time,level\n2031-03-04T00:00:00Z,3.2\n")],
  ] as const;

  test("and every mistake that the loader knows is provoked in these tests", () => {
    const sources = readdirSync(SOURCES).filter((name) => !name.startsWith("plan"));
    const codes = sources.flatMap((name) => {
      const text = readFileSync(new URL(name, SOURCES), "utf8");
      return [...text.matchAll(/code: "([a-z0-9-]+)"|fileProblem\(\s*shownName,\s*"([a-z0-9-]+)"/g)];
    });
    const known = new Set(codes.map((found) => found[1] ?? found[2]!));
    expect(known.size).toBeGreaterThan(30);
    const provoked = new Set<string>([...MISTAKES, ...cases.map(([code]) => ({ code }))].map((c) => c.code));
    provoked.add("more-mistakes");
    expect([...known].filter((code) => code !== "custom" && !provoked.has(code))).toEqual([]);
  });

  test.each(cases)("%s: %s", (code, says, line, path) => {
    let found: readonly Diagnostic[] = [];
    try {
      loadPipeline(path, "shown.yaml", FAKE_STAGES);
    } catch (error) {
      if (!(error instanceof DiagnosticError)) throw error;
      found = error.diagnostics;
    }
    expect(found).toHaveLength(1);
    expect(found[0]).toMatchObject({ code, line, file: "shown.yaml", severity: "error" });
    expect(`${found[0]!.problem}; ${found[0]!.given}; ${found[0]!.todo}`).toContain(says);
  });

  test("a good one gives text, digest and folder", () => {
    const path = write("good.yaml", `\ufeff${GOOD}`);
    const loaded = loadPipeline(path, "good.yaml", FAKE_STAGES);
    expect(loaded.text).toBe(GOOD);
    expect(loaded.folder).toBe(folder);
    expect(loaded.sha256).toMatch(/^[0-9a-f]{64}$/);
    expect(loaded.at(["writes", "digits"])).toEqual({
      line: GOOD.split("\n").indexOf("  digits: 6") + 1,
      column: 11,
    });
  });
});
