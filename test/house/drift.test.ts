/** What is written in several places stays in step: stages, their tests, samples and texts; dependencies; sizes. */
import { readdirSync, readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import { stagesText } from "../../src/cli/stages.ts";
import { readPipeline } from "../../src/pipeline/load.ts";
import { STAGES } from "../../src/stages/registry.ts";

const root = new URL("../../", import.meta.url);
const text = (path: string): string => readFileSync(new URL(path, root), "utf8");
const list = (path: string): string[] =>
  readdirSync(new URL(path, root), { recursive: true, withFileTypes: true })
    .filter((entry) => entry.isFile())
    .map((entry) =>
      `${entry.parentPath}/${entry.name}`.slice(new URL(path, root).pathname.length).replace(/^\//, ""),
    )
    .sort();

const names = [...STAGES.keys()];
const sorted = [...names].sort();
const PIPELINES = list("pipelines/").filter((name) => /\.ya?ml$/.test(name));
const TEXTS = ["README.md", "DEVELOPERS.md", "sample-data/README.md"];

/** Stages named as such in a text or a pipeline. */
const stagesNamed = (path: string): string[] =>
  Array.from(text(path).matchAll(/\bstage: *"?([a-z][a-z-]*)/g), (match) => match[1]!);

describe("stages", () => {
  it("one file each, and nothing else beside the contract, the registry and the parts", () => {
    const files = list("src/stages/").filter((name) => !name.includes("/"));
    expect(files).toEqual([...sorted, "registry", "stage"].sort().map((name) => `${name}.ts`));
  });

  it("are registered under the name of their file", () => {
    const registry = text("src/stages/registry.ts");
    for (const name of names) expect(registry).toContain(`from "./${name}.ts"`);
    for (const [name, stage] of STAGES) expect(stage.name).toBe(name);
  });

  it("have one test file each; other test files begin with a stage's name or belong to all stages", () => {
    const tests = list("test/stages/").filter((name) => /^[^/]*\.test\.ts$/.test(name));
    for (const name of names) expect(tests).toContain(`${name}.test.ts`);
    const forAll = ["contract", "row-contract", "problems"].map((name) => `${name}.test.ts`);
    for (const test of tests)
      expect(
        forAll.includes(test) ||
          names.some((name) => test.startsWith(`${name}-`) || test === `${name}.test.ts`),
        test,
      ).toBe(true);
  });

  it("are all used in a sample pipeline, and the samples use no other", () => {
    const used = new Set(PIPELINES.flatMap((name) => stagesNamed(`pipelines/${name}`)));
    expect([...used].sort()).toEqual(sorted);
  });

  it("are named in the texts as they are in the registry", () => {
    for (const path of TEXTS) {
      const asked = Array.from(text(path).matchAll(/forebay stages ([a-z-]+)/g), (match) => match[1]!);
      for (const name of [...stagesNamed(path), ...asked]) expect(names, path).toContain(name);
    }
    const table = Array.from(text("README.md").matchAll(/^\| `([a-z-]+)` \|/gm), (match) => match[1]!);
    expect(table.filter((name) => STAGES.has(name)).sort()).toEqual(sorted);
  });

  it("are listed by `forebay stages` in the registry's order, each with its sentence", () => {
    const shown = stagesText(STAGES)!;
    const first = shown.split("\n\n")[0]!;
    expect(Array.from(first.matchAll(/^([a-z-]+) {2,}\S/gm), (match) => match[1])).toEqual(names);
    for (const [name, stage] of STAGES) {
      expect(shown.replace(/\s+/g, " ")).toContain(stage.about);
      expect(stage.about).toMatch(/^[A-Z].*\.$/);
      expect(stagesText(STAGES, name)).toContain(`${name}: `);
    }
  });
});

describe("sample pipelines", () => {
  it.each(PIPELINES)("%s loads without a mistake", (name) => {
    expect(() => readPipeline(text(`pipelines/${name}`), name, STAGES)).not.toThrow();
  });
});

describe("the house", () => {
  const manifest = JSON.parse(text("package.json")) as {
    dependencies: Record<string, string>;
    devDependencies: Record<string, string>;
  };
  const sources = list("src/").filter((name) => /\.ts$/.test(name) && !name.endsWith(".d.ts"));

  it("depends at run time on what has its reason in the contributors' guide, and on nothing else", () => {
    const table = /\n## Dependencies\n([\s\S]*)$/.exec(text("DEVELOPERS.md"))![1]!;
    const rows = Array.from(table.matchAll(/^\| ([^|]+) \| ([^|]+) \|$/gm)).slice(2);
    const reasoned = rows.flatMap(([, packages]) => packages!.split(",").map((name) => name.trim()));
    for (const [, , why] of rows) expect(why!.trim().length).toBeGreaterThan(5);
    expect(reasoned.sort()).toEqual(Object.keys(manifest.dependencies).sort());
  });

  it("names every development tool there too", () => {
    const line = /\nDevelopment: (.*)/.exec(text("DEVELOPERS.md"))![1]!;
    for (const name of Object.keys(manifest.devDependencies))
      if (!name.startsWith("@types/")) expect(line).toContain(name);
  });

  it("imports every run-time dependency, and no package besides", () => {
    const imported = new Set(
      sources.flatMap((name) =>
        Array.from(
          text(`src/${name}`).matchAll(
            /^(?:import|export)[^;]*?\bfrom "([^".][^"]*)"|\bimport\("([^".][^"]*)"\)/gm,
          ),
          (match) => (match[1] ?? match[2])!,
        ),
      ),
    );
    const packages = [...imported]
      .filter((name) => !name.startsWith("node:"))
      .map((name) =>
        name
          .split("/")
          .slice(0, name.startsWith("@") ? 2 : 1)
          .join("/"),
      );
    expect([...new Set(packages)].sort()).toEqual(Object.keys(manifest.dependencies).sort());
  });

  it("keeps its files short: none over 350 lines, half of them under 200", () => {
    const lengths = sources.map((name) => text(`src/${name}`).split("\n").length - 1);
    expect(sources.filter((_, i) => lengths[i]! > 350)).toEqual([]);
    const middle = lengths.sort((a, b) => a - b)[Math.floor(lengths.length / 2)]!;
    expect(middle).toBeLessThan(200);
  });

  it("leaves no test out and no note for later", () => {
    const words = new RegExp(
      ["TO" + "DO", "FIX" + "ME", "XX" + "X", "HA" + "CK"].map((w) => `\\b${w}\\b`).join("|"),
    );
    const skipping = /\b(?:it|test|describe)\.(?:only|skip|todo)\b/;
    for (const folder of ["src/", "test/"])
      for (const name of list(folder).filter((file) => /\.(?:ts|mjs)$/.test(file))) {
        expect(text(folder + name), name).not.toMatch(words);
        if (name !== "house/drift.test.ts") expect(text(folder + name), name).not.toMatch(skipping);
      }
  });
});
