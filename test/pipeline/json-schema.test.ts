import { readdirSync, readFileSync } from "node:fs";
import { Ajv2020 } from "ajv/dist/2020.js";
import { describe, expect, test } from "vitest";
import { parse } from "yaml";
import { schemaText } from "../../src/cli/schema.ts";
import { STAGES } from "../../src/stages/registry.ts";
import { FAKE_STAGES } from "./fake-stages.ts";
import { GOOD, withMistake } from "./good-file.ts";
import { MISTAKES } from "./mistakes.ts";

// What an editor does: parse the YAML, then judge the data by the schema. Strict: no unknown keyword passes.
const validator = (text: string) =>
  new Ajv2020({
    strict: true,
    strictRequired: false,
    allowUnionTypes: true,
    allErrors: true,
    messages: false,
  }).compile(JSON.parse(text));

describe("the JSON Schema", () => {
  const validate = validator(schemaText(FAKE_STAGES));

  test("accepts the good file", () => {
    expect(validate(parse(GOOD)), JSON.stringify(validate.errors, null, 1)).toBe(true);
  });

  test.each(MISTAKES.filter((c) => c.schema !== false).map((c) => [c.code, c.by.slice(0, 50), c] as const))(
    "rejects %s: %s",
    (_code, _by, c) => {
      expect(validate(parse(withMistake(c).text))).toBe(false);
    },
  );

  test("says what it is, and describes every setting", () => {
    const schema = JSON.parse(schemaText(FAKE_STAGES));
    expect(schema.$schema).toBe("https://json-schema.org/draft/2020-12/schema");
    expect(schema.required).toEqual(["name", "logs", "channels", "chain", "writes"]);
    for (const stage of schema.properties.chain.items.oneOf) {
      expect(stage.description).toBeTruthy();
      for (const [key, setting] of Object.entries<{ description?: string }>(stage.properties))
        if (key !== "stage") expect(setting.description, key).toBeTruthy();
    }
  });

  test("is the same text every time", () => {
    expect(schemaText(FAKE_STAGES)).toBe(schemaText(FAKE_STAGES));
  });
});

describe("the pipelines that come with forebay", () => {
  const folder = new URL("../../pipelines/", import.meta.url);
  const validate = validator(schemaText(STAGES));
  test.each(readdirSync(folder).filter((name) => /\.ya?ml$/.test(name)))(
    "%s fits the JSON Schema",
    (name) => {
      const data = parse(readFileSync(new URL(name, folder), "utf8"));
      expect(validate(data), JSON.stringify(validate.errors, null, 1)).toBe(true);
    },
  );
});
