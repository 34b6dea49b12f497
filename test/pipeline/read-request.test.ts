import { expect, test } from "vitest";
import { encodingKnown } from "../../src/logs/text-decoding.ts";
import { readPipeline } from "../../src/pipeline/load.ts";
import { readRequest } from "../../src/pipeline/read-request.ts";
import { ENCODINGS } from "../../src/pipeline/schema.ts";
import { FAKE_STAGES } from "./fake-stages.ts";
import { GOOD } from "./good-file.ts";

const request = (text: string) => readRequest(readPipeline(text, "p.yaml", FAKE_STAGES).pipeline, []);

test("the log reader gets what the file says", () => {
  expect(request(GOOD)).toEqual({
    files: [],
    channels: [
      { name: "level", column: "LEVEL_M" },
      { name: "inflow", column: "Q_IN" },
    ],
    time: { column: "logged_at", form: "iso-8601", zone: "UTC" },
    missing: ["NAN", "-9999", "-7"],
    layout: { separator: ";", decimalSign: ",", namesLine: 1, dataFromLine: 3 },
    lateBy_us: 60_000_000,
  });
});

test.each([
  ['"\\t"', "\t"],
  ["tab", "\t"],
  ["blank", " "],
  ['","', ","],
])("a separator may be written as a sign or as a word: %s", (written, sign) => {
  const text = GOOD.replace('separator: ";", decimal-sign: ","', `separator: ${written}`);
  expect(request(text).layout.separator).toBe(sign);
});

test("every encoding that a pipeline may name can be decoded", () => {
  for (const encoding of ENCODINGS) expect(encodingKnown(encoding), encoding).toBe(true);
});
