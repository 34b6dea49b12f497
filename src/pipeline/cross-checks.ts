/** What the schema cannot judge: whether the parts of a pipeline file fit each other. */
import { nearestName, quoted } from "../diagnostics.ts";
import type { Mistake, Path } from "./explain.ts";
import { isMapping, valueAt } from "./plain-data.ts";
import { parseFrequency } from "./quantities.ts";

/** Names that the columns of the outputs have already. */
const TIME_COLUMN = "time";
const FLAG_END = "_flag";

/**
 * Looks at the raw data, so that it works beside any mistake that the schema found; what has the wrong
 * type is left to the schema.
 */
export function crossChecks(data: unknown): Mistake[] {
  const channels = valueAt(data, ["channels"]);
  const names = isMapping(channels) ? Object.keys(channels) : [];
  return [
    ...channelNames(names),
    ...(isMapping(channels) ? chainChannels(data, names) : []),
    ...placeholders(data),
    ...requirementBands(data),
    ...layoutLines(data),
  ];
}

function channelNames(names: readonly string[]): Mistake[] {
  const mistakes: Mistake[] = [];
  const folded = (name: string) => name.normalize("NFC").toLowerCase();
  const first = new Map<string, string>();
  for (const name of names) {
    const path = ["channels", name];
    const word = folded(name);
    const earlier = first.get(word);
    if (word === TIME_COLUMN || word.endsWith(FLAG_END))
      mistakes.push({
        code: "reserved-name",
        path,
        at: "key",
        problem: `a channel cannot be called ${quoted(name)}: a column of the clean series is`,
        given: quoted(name),
        allowed: `a name other than ${TIME_COLUMN} that does not end in ${FLAG_END}`,
        todo: "choose another name; the log's own column name stays under column",
      });
    else if (earlier !== undefined)
      mistakes.push({
        code: "channel-clash",
        path,
        at: "key",
        problem: `channels ${quoted(earlier)} and ${quoted(name)} differ in capitals or in how accents are stored only`,
        given: quoted(name),
        allowed: "names that stay apart in any program that reads the clean series",
        todo: "choose another name for one of them",
      });
    else first.set(word, name);
  }
  return mistakes;
}

function chainChannels(data: unknown, names: readonly string[]): Mistake[] {
  const chain = valueAt(data, ["chain"]);
  const mistakes: Mistake[] = [];
  for (const i of Array.isArray(chain) ? chain.keys() : []) {
    const list = valueAt(data, ["chain", i, "channels"]);
    if (!Array.isArray(list)) continue;
    for (const [j, given] of list.entries()) {
      if (typeof given !== "string") continue;
      const path = ["chain", i, "channels", j];
      if (!names.includes(given)) {
        const near = nearestName(given, names);
        mistakes.push({
          code: "unknown-channel",
          path,
          at: "value",
          problem: `there is no channel ${quoted(given)}`,
          given: quoted(given),
          allowed: names.map(quoted).join(", "),
          todo: near === undefined ? "name a channel of this pipeline" : `write ${near}`,
        });
      } else if (list.indexOf(given) < j)
        mistakes.push({
          code: "repeated-channel",
          path,
          at: "value",
          problem: `channel ${quoted(given)} stands twice in the list`,
          given: quoted(given),
          allowed: "each channel once",
          todo: "take one out",
        });
    }
  }
  return mistakes;
}

function placeholders(data: unknown): Mistake[] {
  const files = valueAt(data, ["logs", "files"]);
  const patterns: [Path, unknown][] = Array.isArray(files)
    ? files.map((file, i) => [["logs", "files", i], file])
    : [[["logs", "files"], files]];
  const folderPath = ["writes", "folder"];
  const folder = valueAt(data, folderPath);
  const mistakes = patterns.flatMap(([path, pattern]) =>
    unknownPlaceholders(path, pattern, ["{logger}", "{date}"]),
  );
  mistakes.push(...unknownPlaceholders(folderPath, folder, ["{logger}"]));
  const mentions = (text: unknown) => typeof text === "string" && text.includes("{logger}");
  if (mentions(folder) && files !== undefined && !patterns.some(([, pattern]) => mentions(pattern)))
    mistakes.push({
      code: "logger-not-found",
      path: folderPath,
      at: "value",
      problem:
        "the folder is named after the logger, but logs.files does not say where the logger's name stands",
      given: quoted(String(folder)),
      allowed: "{logger} in logs.files too",
      todo: "write {logger} into logs.files where the loggers' names differ",
    });
  return mistakes;
}

function unknownPlaceholders(path: Path, text: unknown, known: readonly string[]): Mistake[] {
  if (typeof text !== "string") return [];
  return [...text.matchAll(/\{[^{}]*\}?|\}/g)].flatMap(([found]) => {
    if (known.includes(found)) return [];
    const near = nearestName(found, known);
    return [
      {
        code: "unknown-placeholder",
        path,
        at: "value" as const,
        problem: `${quoted(found)} stands for nothing here`,
        given: quoted(text),
        allowed: `${known.join(" and ")}; no other braces`,
        todo: near === undefined ? "take the braces out" : `write ${near}`,
      },
    ];
  });
}

function requirementBands(data: unknown): Mistake[] {
  return ["keep", "remove"].flatMap((key) => {
    const bands = valueAt(data, ["requirements", key]);
    if (!Array.isArray(bands)) return [];
    return bands.flatMap((band, i): Mistake[] => {
      const [from, to] = [hertzOf(valueAt(band, ["from"])), hertzOf(valueAt(band, ["to"]))];
      if (from === null || to === null || to > from) return [];
      return [
        {
          code: "empty-band",
          path: ["requirements", key, i, "to"],
          at: "value",
          problem: "the band is empty",
          given: quoted(`from ${valueAt(band, ["from"])} to ${valueAt(band, ["to"])}`),
          allowed: "to above from; of two periods, the longer one is the lower frequency",
          todo: to < from ? "swap them" : "correct one of them",
        },
      ];
    });
  });
}

function hertzOf(text: unknown): number | null {
  const parsed = typeof text === "string" ? parseFrequency(text) : null;
  return parsed !== null && "hz" in parsed ? parsed.hz : null;
}

function layoutLines(data: unknown): Mistake[] {
  const at = (key: string) => valueAt(data, ["logs", "layout", key]);
  const [names, first] = [at("names-line"), at("data-from-line")];
  const mistakes: Mistake[] = [];
  if (typeof names === "number" && typeof first === "number" && first <= names)
    mistakes.push({
      code: "layout-lines",
      path: ["logs", "layout", "data-from-line"],
      at: "value",
      problem: "the data begin before the line that names the columns ends",
      given: `names-line ${names}, data-from-line ${first}`,
      allowed: "data-from-line above names-line",
      todo: `write ${names + 1} or more`,
    });
  if (at("separator") === "," && at("decimal-sign") === ",")
    mistakes.push({
      code: "layout-signs",
      path: ["logs", "layout", "decimal-sign"],
      at: "value",
      problem: "the comma cannot both separate cells and mark decimals",
      given: "a comma for both",
      allowed: "two signs",
      todo: "look into a log: with decimal commas, the separator is most often ;",
    });
  return mistakes;
}
