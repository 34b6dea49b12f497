#!/usr/bin/env node
/**
 * Makes the sample logs and their known truth, the same bytes each time: `node sample-data/make.mjs [FOLDER]`.
 * FOLDER is this one when left out. See README.md for the story.
 */
import { createHash } from "node:crypto";
import { existsSync, mkdirSync, readFileSync, writeFileSync } from "node:fs";
import { dirname, join } from "node:path";
import { fileURLToPath } from "node:url";
import { gunzipSync, gzipSync } from "node:zlib";
import { makeLevel } from "./make/level.mjs";
import { makeTemperature } from "./make/temperature.mjs";
import { makeTrouble } from "./make/trouble.mjs";
import { makeVibration } from "./make/vibration.mjs";

const folder = process.argv[2] ?? dirname(fileURLToPath(import.meta.url));

/** Compressed bytes may differ between releases of the compressor, so a file with the right content stays. */
function writeGzip(path, text) {
  if (existsSync(path) && gunzipSync(readFileSync(path)).equals(Buffer.from(text))) return;
  writeFileSync(path, gzipSync(text, { level: 9 }));
}

const logs = {
  level: makeLevel(),
  vibration: makeVibration(),
  temperature: makeTemperature(),
  trouble: makeTrouble(),
};
const truth = {
  about: "What was put into the sample logs. Written by make.mjs; digests are of the text, before gzip.",
  site: "Thurnwick cavern (invented)",
  logs: {},
};
for (const [name, log] of Object.entries(logs)) {
  const files = [];
  for (const [file, text] of log.files) {
    const path = join(folder, file);
    mkdirSync(dirname(path), { recursive: true });
    if (file.endsWith(".gz")) writeGzip(path, text);
    else writeFileSync(path, text);
    files.push({
      file,
      text_bytes: Buffer.byteLength(text),
      lines: text.split("\n").length - (text.endsWith("\n") ? 1 : 0),
      text_sha256: createHash("sha256").update(text).digest("hex"),
    });
  }
  truth.logs[name] = { files, ...log.truth };
}
writeFileSync(join(folder, "truth.json"), `${JSON.stringify(truth, null, 2)}\n`);
