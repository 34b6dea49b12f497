import { join } from "node:path";
import { Ajv2020 } from "ajv/dist/2020.js";
import { describe, expect, it } from "vitest";
import { accountText } from "../../src/report/account.ts";
import { forebay, place, put, ROOT, text } from "../cli/harness.ts";

const folder = place();

describe("schema of the account", () => {
  const schema = JSON.parse(forebay(folder, "schema", "--account").stdout);
  const validate = new Ajv2020({ strict: false }).compile(schema);

  it("accepts the account of every sample pipeline, and one with nearly nothing in it", () => {
    put(folder, "log.csv", "t,x\n0,1\n1,1\n2,1\n");
    put(
      folder,
      "bare.yaml",
      "name: bare\nlogs: { files: log.csv, time: { column: t, form: unix-s } }\nchannels: { x: { column: x, unit: m } }\nchain: [{ stage: resample, interval: 1 s }, { stage: report }]\nwrites: { folder: bare }\n",
    );
    const runs = ["seiche-level", "pump-bearing", "intake-temperature"].map((n) =>
      join(ROOT, "pipelines", `${n}.yaml`),
    );
    for (const path of [...runs, "bare.yaml"]) {
      const name = path.replace(/^.*\//, "").replace(".yaml", "");
      expect(forebay(folder, "clean", path, "--folder", name, "--quiet").status).toBe(0);
      const account = JSON.parse(text(folder, name, `${name}.account.json`));
      expect(validate(account), JSON.stringify(validate.errors)).toBe(true);
      delete account.stages[0].delay;
      expect(validate(account)).toBe(false);
    }
  });
});

describe("text of the account", () => {
  it("keeps a pipeline's text as it is, lists with blanks inside included", () => {
    const pipelineText = "chain: [ 1, 2, 3 ]\nweights: [\n  1,\n  2\n]\n";
    const text = accountText({ text: pipelineText, list: [1, 2.5, null, -3e-7] });
    expect(JSON.parse(text)).toEqual({ text: pipelineText, list: [1, 2.5, null, -3e-7] });
    expect(text).toContain("[1, 2.5, null, -3e-7]");
  });
});
