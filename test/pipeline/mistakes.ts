/** Every mistake that can be made in a pipeline file: the table for loader and JSON Schema. */
import { GOOD, type MistakeCase } from "./good-file.ts";

const YAML: MistakeCase[] = [
  { code: "yaml-syntax", replace: "points: 5", by: "points: §[5", schema: false, says: "not closed" },
  { code: "yaml-syntax", replace: "points: 5", by: "points: §a: 5", schema: false, says: "second colon" },
  { code: "yaml-syntax", replace: "  digits: 6", by: "§\tdigits: 6", schema: false, says: "a tab" },
  {
    code: "yaml-syntax",
    replace: "unit: m }",
    by: "unit: §*m }",
    schema: false,
    says: "put the text into quotes",
  },
  { code: "yaml-syntax", replace: "  settled", by: "  ? §[a]\n  : 1\n  settled", schema: false },
  {
    code: "duplicate-key",
    replace: "  digits: 6",
    by: "  digits: 6\n  §digits: 7",
    schema: false,
    says: "twice",
  },
  { code: "several-documents", replace: "requirements:", by: "§---\nrequirements:", schema: false },
  { code: "unknown-tag", replace: "column: LEVEL_M", by: "column: §!level LEVEL_M", schema: false },
  {
    code: "yaml-version",
    replace: "name: sump-level",
    by: "§%YAML 1.1\n---\nname: sump-level",
    schema: false,
  },
  {
    code: "too-many-aliases",
    replace: "name: sump-level",
    by: `§x1: &x1 [a]\n${bomb()}name: sump-level`,
    schema: false,
  },
  {
    code: "nested-too-deeply",
    replace: "points: 5",
    by: `points: ${"[".repeat(97)}§${"[".repeat(20_000)}`,
    schema: false,
  },
];

function bomb(): string {
  const repeat = (n: number) => `[${Array.from({ length: 9 }, () => `*x${n}`).join(", ")}]`;
  return [1, 2, 3].map((n) => `x${n + 1}: &x${n + 1} ${repeat(n)}\n`).join("");
}

const KEYS: MistakeCase[] = [
  { code: "unknown-key", replace: "about: Level", by: "§abot: Level", says: "write about" },
  { code: "unknown-key", replace: "  settled:", by: "  §setled:", says: "write settled" },
  {
    code: "unknown-key",
    replace: "layout: { separator",
    by: "layout: { §seperator",
    says: "write separator",
  },
  { code: "unknown-key", replace: "    points: 5", by: "    §pionts: 5", says: "write points" },
  { code: "unknown-key", replace: "    points: 5", by: "    §qwertyuiop: 5", says: "take it out" },
  { code: "unknown-key", replace: "{ over: 31 s,", by: "{ over: 31 s, §ovr: 1,", says: "smooth.spike" },
  { code: "unknown-key", replace: "{ from: 0 Hz, to: 0.1 mHz }", by: "{ from: 0 Hz, to: 0.1 mHz, §too: 1 }" },
  {
    code: "unknown-key",
    replace: "ripple: 0.1 dB }",
    by: "ripple: 0.1 dB, §riple: 1 }",
    says: "write ripple",
  },
  { code: "unknown-key", replace: "unit: m }", by: "unit: m, §__proto__: 1 }" },
  { code: "unknown-key", replace: "  digits: 6", by: "  §__proto__: { digits: 6 }" },
  { code: "unknown-key", replace: "  digits: 6", by: "  §constructor: 6" },
  { code: "unknown-key", replace: "    points: 5", by: "    §<<: { points: 5 }" },
  { code: "missing-key", replace: "name: sump-level\n", by: "§", says: "add name: sump-level" },
  {
    code: "missing-key",
    replace: "    column: logged_at\n",
    by: "",
    says: "logs.time has no column",
    ...mark("  time:", "  §time:"),
  },
  {
    code: "missing-key",
    replace: "level: { column: LEVEL_M, unit: m }",
    by: "§level: { column: LEVEL_M }",
    says: "add unit: m",
  },
  {
    code: "missing-key",
    replace: "writes:\n  folder: ../cleaned/{logger}",
    by: "§writes:",
    says: "writes has no folder",
  },
  {
    code: "missing-key",
    replace: "  - stage: cut\n    shape: low-pass\n",
    by: "  - §stage: cut\n",
    says: "cut has no shape",
  },
  {
    code: "missing-key",
    replace: "  - stage: tell\n    bands:",
    by: "  - §bands:",
    says: "stage 4 does not say",
  },
  {
    code: "missing-key",
    replace: "  - stage: tell\n    bands:",
    by: "  - §tell:\n    bands:",
    says: "write stage: tell",
  },
  {
    code: "missing-key",
    replace: "tide: { from: 0 Hz, to: 0.1 mHz }",
    by: "§tide: { from: 0 Hz }",
    says: "tell.bands.tide has no to",
  },
  {
    code: "missing-key",
    replace: "{ from: 0 Hz, to: 2 mHz, ripple: 0.1 dB }",
    by: "§{ from: 0 Hz, to: 2 mHz }",
    says: "add ripple: 0.1 dB",
  },
];

/** For cases whose place is not in the text that changes. */
function mark(replace: string, by: string): Partial<MistakeCase> {
  return { replace: `${replace}\n    column: logged_at\n`, by: `${by}\n` };
}

const VALUES: MistakeCase[] = [
  { code: "empty-value", replace: "points: 5", by: "§points:", says: "points" },
  { code: "empty-value", replace: "weights: [1, 2.5, 1]", by: "weights: [1, §~, 1]", says: "entry 2" },
  { code: "empty-value", replace: "level: { column: LEVEL_M, unit: m }", by: "§level:" },
  { code: "no-unit", replace: "interval: 1/4 s", by: "interval: §10", says: "a number without a unit" },
  { code: "no-unit", replace: "interval: 1/4 s", by: "interval: §10", says: "10 s" },
  { code: "no-unit", replace: "share: 80 %", by: "share: §80", says: "80 %" },
  { code: "no-unit", replace: "pass: [2 mHz, 10 min]", by: "pass: [2 mHz, §3]", says: "entry 2" },
  { code: "no-unit", replace: "pass: [2 mHz, 10 min]", by: "pass: §3", says: "cut.pass: a number" },
  { code: "not-a-quantity", replace: "interval: 1/4 s", by: "interval: §10 sec", says: "write 10 s" },
  { code: "not-a-quantity", replace: "interval: 1/4 s", by: "interval: §1,5 s", says: "1.5 s" },
  { code: "not-a-quantity", replace: "interval: 1/4 s", by: "interval: §-1 s", says: "write 1 s" },
  { code: "not-a-quantity", replace: "interval: 1/4 s", by: "interval: §1/0 s", schema: false },
  {
    code: "not-a-quantity",
    replace: "anchor: 2031-03-04T00:00:00Z",
    by: "anchor: §2031-03-04T00:00:00",
    says: "00Z",
  },
  {
    code: "not-a-quantity",
    replace: "anchor: 2031-03-04T00:00:00Z",
    by: "anchor: §2031-02-30",
    schema: false,
  },
  { code: "not-a-quantity", replace: "share: 80 %", by: "share: §80 percent", says: "write 80 %" },
  { code: "not-a-quantity", replace: "drift: -20 ppm", by: "drift: §-20 ppb" },
  { code: "not-a-quantity", replace: "slope: 0.5 m/s", by: "slope: §0.5 m" },
  {
    code: "not-a-quantity",
    replace: "pass: [2 mHz, 10 min]",
    by: "pass: [2 mHz, §10 m]",
    says: "write 10 min",
  },
  { code: "not-a-quantity", replace: "to: 100 Hz", by: "to: §100 HZ", says: "write 100 Hz" },
  { code: "not-a-quantity", replace: "floor: -80 dB", by: "floor: §-80 db", says: "write 80 dB" },
  {
    code: "out-of-range",
    replace: "interval: 1/4 s",
    by: "interval: §2 d",
    schema: false,
    says: "write 1 d or less",
  },
  {
    code: "out-of-range",
    replace: "interval: 1/4 s",
    by: "interval: §1e-9 s",
    schema: false,
    says: "write 1 us or more",
  },
  { code: "out-of-range", replace: "over: 31 s", by: "over: §0 s", schema: false, says: "zero" },
  { code: "out-of-range", replace: "pass: [2 mHz, 10 min]", by: "pass: §0 Hz", schema: false, says: "zero" },
  {
    code: "out-of-range",
    replace: "floor: -80 dB",
    by: "floor: §80 dB",
    schema: false,
    says: "write -80 dB",
  },
  { code: "out-of-range", replace: "share: 80 %", by: "share: §120 %", schema: false, says: "1 % to 100 %" },
  {
    code: "out-of-range",
    replace: "to: 2 mHz, ripple",
    by: "to: §0.1 cycles/sample, ripple",
    says: "outside a stage",
  },
  { code: "out-of-range", replace: "points: 5", by: "points: §100", says: "from 1 to 99" },
  { code: "out-of-range", replace: "points: 5", by: "points: §2.5", says: "whole number" },
  { code: "out-of-range", replace: "weights: [1, 2.5, 1]", by: "weights: [1, §.inf, 1]" },
  { code: "out-of-range", replace: "digits: 6", by: "digits: §18" },
  { code: "wrong-type", replace: "points: 5", by: 'points: §"5"', says: "without quotes" },
  { code: "wrong-type", replace: "points: 5", by: "points: §[5]", says: "a list stands" },
  { code: "wrong-type", replace: "interval: 1/4 s", by: "interval: §{ s: 1 }", says: "a mapping stands" },
  { code: "wrong-type", replace: "weights: [1, 2.5, 1]", by: "weights: §1" },
  { code: "wrong-type", replace: "removed: true", by: "removed: §yes", says: "write true" },
  { code: "wrong-type", replace: "removed: true", by: 'removed: §"true"', says: "without quotes" },
  { code: "wrong-type", replace: "column: LEVEL_M", by: "column: §7", says: 'put it in quotes: "7"' },
  {
    code: "wrong-type",
    replace: "spike: { over: 31 s, deviations: 6 }",
    by: "spike: §31 s",
    says: "a mapping",
  },
  {
    code: "wrong-type",
    replace: "  - stage: tell\n    bands:\n      tide: { from: 0 Hz, to: 0.1 mHz }",
    by: "  - §tell",
    says: "write { stage: tell }",
  },
  { code: "wrong-type", replace: "level: { column: LEVEL_M, unit: m }", by: "level: §LEVEL_M" },
  { code: "wrong-type", replace: "bands:\n      tide: { from: 0 Hz, to: 0.1 mHz }", by: "bands: §[tide]" },
  { code: "not-a-choice", replace: "shape: low-pass", by: "shape: §lowpass", says: "write low-pass" },
  { code: "not-a-choice", replace: 'separator: ";"', by: 'separator: §"/"' },
  { code: "list-length", replace: "weights: [1, 2.5, 1]", by: "weights: §[]", says: "too few" },
  {
    code: "list-length",
    replace: "weights: [1, 2.5, 1]",
    by: "weights: §[1, 2, 3, 4, 5, 6]",
    says: "too many",
  },
  { code: "list-length", replace: "channels: [level]", by: "channels: §[]" },
  {
    code: "list-length",
    replace: "  level: { column: LEVEL_M, unit: m }\n  inflow: { column: Q_IN, unit: m3/s }",
    by: "  {}",
    ...emptyChannels(),
  },
  { code: "bad-name", replace: "name: sump-level", by: "name: §sump/level", says: "sump-level" },
  { code: "bad-name", replace: "name: sump-level", by: "name: §../../etc" },
  { code: "bad-name", replace: "  inflow: {", by: '  §"<img>": {', says: "letters, digits" },
  { code: "bad-name", replace: "  inflow: {", by: "  §=cmd: {" },
  { code: "bad-name", replace: "  inflow: {", by: "  §__proto__: {" },
  { code: "bad-name", replace: "  inflow: {", by: `  §${"x".repeat(61)}: {` },
  { code: "bad-text", replace: "unit: m }", by: 'unit: §"  " }', says: "empty" },
  { code: "bad-text", replace: "unit: m }", by: 'unit: §"m\\nX" }', says: "line break" },
  { code: "bad-text", replace: "unit: m }", by: `unit: §${"m".repeat(41)} }`, says: "too long" },
  { code: "unknown-stage", replace: "stage: smooth", by: "stage: §smoth", says: "write smooth" },
  { code: "unknown-stage", replace: "stage: smooth", by: "stage: §7", says: "not the name of a stage" },
];

function emptyChannels(): Partial<MistakeCase> {
  const replace = GOOD.slice(GOOD.indexOf("channels:"), GOOD.indexOf("chain:"));
  return { replace, by: "channels: §{}\n", says: "at least 1" };
}

const TOGETHER: MistakeCase[] = [
  {
    code: "unknown-channel",
    replace: "channels: [level]",
    by: "channels: [§levl]",
    schema: false,
    says: "write level",
  },
  { code: "repeated-channel", replace: "channels: [level]", by: "channels: [level, §level]", schema: false },
  { code: "reserved-name", replace: "  inflow: {", by: "  §time: {", schema: false },
  { code: "reserved-name", replace: "  inflow: {", by: "  §level_flag: {", schema: false },
  { code: "channel-clash", replace: "  inflow: {", by: "  §Level: {", schema: false },
  {
    code: "unknown-placeholder",
    replace: "level-{date}.csv",
    by: "level-{day}.csv",
    schema: false,
    ...files("{day}"),
  },
  {
    code: "unknown-placeholder",
    replace: "folder: ../cleaned/{logger}",
    by: "folder: §../cleaned/{date}",
    schema: false,
  },
  {
    code: "logger-not-found",
    replace: "../logs/{logger}/level-{date}.csv",
    by: "../logs/*.csv",
    schema: false,
    ...folder(),
  },
  {
    code: "empty-band",
    replace: "to: 2 mHz, ripple",
    by: "to: §0 mHz, ripple",
    schema: false,
    says: "correct one",
  },
  {
    code: "empty-band",
    replace: "from: 0.1 Hz, to: 0.5 Hz",
    by: "from: 0.1 Hz, to: §1 h",
    schema: false,
    says: "swap them",
  },
  { code: "layout-lines", replace: "data-from-line: 3", by: "data-from-line: §1", schema: false },
  {
    code: "layout-signs",
    replace: 'separator: ";", decimal-sign: ","',
    by: 'separator: ",", decimal-sign: §","',
    schema: false,
  },
];

function files(name: string): Partial<MistakeCase> {
  return {
    replace: "files: ../logs/{logger}/level-{date}.csv",
    by: `files: §../logs/{logger}/level-${name}.csv`,
  };
}

function folder(): Partial<MistakeCase> {
  const [, from = "", to = ""] = /files: (\S+)[\s\S]*folder: (\S+)/.exec(GOOD) ?? [];
  const replace = GOOD.slice(GOOD.indexOf(from), GOOD.indexOf(to) + to.length);
  return { replace, by: replace.replace(from, "../logs/*.csv").replace(to, `§${to}`) };
}

export const MISTAKES: readonly MistakeCase[] = [...YAML, ...KEYS, ...VALUES, ...TOGETHER];
