/** The pipeline file, section by section, with every stage's own settings. */
import { z } from "zod";
import { jsonSchemaOf } from "./collections.ts";
import type { JsonSchema, Kind } from "./kind.ts";
import {
  count,
  decibels,
  duration,
  finite,
  frequency,
  instant,
  list,
  name,
  oneOf,
  record,
  sign,
  strictObject,
  text,
  truth,
} from "./kinds.ts";

/** What the pipeline file needs to know of a stage. */
export interface StageSchema {
  readonly name: string;
  /** One sentence. */
  readonly about: string;
  /** An object schema made by `stageSettings`. */
  readonly settings: z.ZodType;
}
export type StageSchemas = ReadonlyMap<string, StageSchema>;

const SEPARATORS = new Map([
  [",", ","],
  [";", ";"],
  ["|", "|"],
  ["tab", "\t"],
  ["\t", "\t"],
  ["blank", " "],
  [" ", " "],
]);

const THOUSANDS = new Map([
  [",", ","],
  [".", "."],
  ["'", "'"],
  ["blank", " "],
]);

/** Names of the encoding standard (WHATWG), which the log reader decodes by. */
export const ENCODINGS = ["utf-8", "utf-16le", "utf-16be", "iso-8859-1", "windows-1252"] as const;

const layout = strictObject(
  {
    separator: sign(SEPARATORS, { about: "Sign between two cells." }).optional(),
    "decimal-sign": oneOf([".", ","], { about: "Sign between whole part and fraction." }).optional(),
    encoding: oneOf(ENCODINGS, { about: "How characters are stored." }).optional(),
    "thousands-sign": sign(THOUSANDS, { about: "Sign between groups of three digits." }).optional(),
    "names-line": count({ min: 1, max: 1_000_000, about: "Line that holds the column names." }).optional(),
    "data-from-line": count({ min: 1, max: 1_000_000, about: "Line of the first data row." }).optional(),
  },
  "How the log files are laid out; what is left out is found from the file.",
);

const time = strictObject(
  {
    column: list(text({ about: "A column's name.", example: "logged_at", line: true }), {
      min: 1,
      max: 4,
      single: true,
      about: "Column that holds the times, or several whose cells are put together: [Date, Time].",
    }),
    form: text({
      about:
        "How times are written: iso-8601, unix-s, unix-ms, unix-us, unix-ns, elapsed-s, elapsed-ms, elapsed-us, elapsed-ns, serial-day-1900, serial-day-1904, or a Unicode date pattern; found from the cells when left out, asked for where that is not certain.",
      example: "dd/MM/yyyy HH:mm:ss",
      line: true,
    }).optional(),
    zone: text({
      about: "Time zone of cells without an offset: an IANA name, UTC, or an offset such as +01:00.",
      example: "Europe/Berlin",
      line: true,
    }).optional(),
    pivot: count({
      min: 1800,
      max: 2200,
      about: "First of the hundred years that two-digit years stand for; 1970 when left out.",
    }).optional(),
    date: text({
      about: "Date of the first row, for cells that hold the time of day only.",
      example: '"2031-03-04"',
      line: true,
    }).optional(),
    start: instant({ about: "Time at which an elapsed count is zero." }).optional(),
    rollover: finite({
      min: 1,
      max: 1e18,
      about: "The count starts again from zero at this value.",
    }).optional(),
  },
  "The times of the rows.",
);

const logs = strictObject(
  {
    files: list(text({ about: "A path or glob.", example: "../logs/*.csv", line: true }), {
      min: 1,
      max: 1000,
      single: true,
      about:
        "Log files: paths or globs, relative to the pipeline file; {logger} makes one series per logger, {date} stands for any text.",
    }),
    time,
    missing: list(text({ about: "A code.", example: '"-9999"', line: true, numbers: true }), {
      max: 1000,
      default: [],
      about:
        "Cells that mean that a value is missing, beside empty ones; a number matches in every spelling.",
    }),
    layout: layout.prefault({}),
    settled: duration({
      about: "A file that changed more recently than this is left for the next run; off when left out.",
    }).optional(),
    "late-by": duration({
      zero: true,
      default: "10 min",
      about: "Rows up to this much late are put in their place; later ones are set aside.",
    }),
  },
  "The log files and how they are read.",
);

const channel = strictObject(
  {
    column: text({ about: "Name of the column in the log.", example: "LEVEL_M", line: true }),
    unit: text({
      about: "Unit of the values; it goes with them to every label.",
      example: "m",
      line: true,
      longest: 40,
    }),
  },
  "A column of the log and its unit.",
);

const band = {
  from: frequency({ zero: true, perSample: false, about: "Lower edge of the band." }),
  to: frequency({ perSample: false, about: "Upper edge of the band." }),
};

const requirements = strictObject(
  {
    keep: list(
      strictObject(
        {
          ...band,
          ripple: decibels({
            min: 1e-6,
            max: 60,
            example: "0.1 dB",
            about: "Largest departure from gain 1.",
          }),
        },
        "A band that must be kept.",
      ),
      { max: 100, about: "Bands that must be kept." },
    ).optional(),
    remove: list(
      strictObject(
        {
          ...band,
          attenuation: decibels({ min: 0.01, max: 300, example: "40 dB", about: "Least attenuation." }),
        },
        "A band that must be taken out.",
      ),
      { max: 100, about: "Bands that must be taken out." },
    ).optional(),
    delay: duration({ zero: true, about: "Most that the clean series may be late." }).optional(),
  },
  "Checked by rehearse on the design and by clean on the data.",
);

const writes = strictObject(
  {
    folder: text({
      about: "Folder of the outputs, relative to the pipeline file; it may hold {logger}.",
      example: "../cleaned",
      line: true,
    }),
    split: oneOf(["none"], { default: "none", about: "One set of files for the whole record." }),
    digits: count({
      min: 1,
      max: 17,
      about: "Significant digits of the values; shortest exact when left out.",
    }).optional(),
    removed: truth({
      default: false,
      about: "Write what was removed too, on the grid of the resampled log.",
    }),
    flags: truth({ default: true, about: "Write a _flag column beside each channel." }),
    page: truth({ default: true, about: "Write the report as a page." }),
  },
  "What is written, and where.",
);

function stageEntry(stages: StageSchemas): Kind<unknown> {
  const entries = [...stages.values()].map((stage) => {
    if (!(stage.settings instanceof z.ZodObject)) throw new Error(`settings of ${stage.name} are no mapping`);
    return z
      .strictObject({ stage: z.literal(stage.name), ...stage.settings.shape })
      .meta({ title: stage.name, description: stage.about });
  });
  return z.discriminatedUnion("stage", entries as unknown as [z.ZodObject, ...z.ZodObject[]]);
}

/** Schema of the whole file; `stages` says which stages there are. */
export function pipelineSchema(stages: StageSchemas) {
  return strictObject(
    {
      name: name({ about: "Name of the pipeline; its outputs are called after it.", example: "sump-level" }),
      about: text({
        about: "What the clean series is for.",
        example: "Level in the sump, for the weekly water balance.",
        longest: 2000,
      }).optional(),
      logs,
      channels: record(channel, {
        min: 1,
        about: "Channels by name, in the order of the outputs: the column in the log, and the unit.",
      }),
      chain: list(stageEntry(stages), {
        min: 1,
        max: 100,
        about: "The stages, in the order in which they work.",
      }),
      requirements: requirements.prefault({}),
      writes,
    },
    "A forebay pipeline: from which logs, by which stages, to which outputs.",
  );
}

type File = z.output<ReturnType<typeof pipelineSchema>>;
export type LogsSettings = File["logs"];
export type Requirements = File["requirements"];
export type WritesSettings = File["writes"];

export interface ChannelSettings {
  readonly name: string;
  readonly column: string;
  readonly unit: string;
}

export interface ChainEntry {
  readonly stage: string;
  /** Parsed by the stage's own schema. */
  readonly settings: unknown;
  /** Names of channels; all when left out. */
  readonly channels?: readonly string[];
  /** Place in the chain, from 0. */
  readonly index: number;
}

export interface Pipeline {
  readonly name: string;
  readonly about?: string;
  readonly logs: LogsSettings;
  /** In the order of the file. */
  readonly channels: readonly ChannelSettings[];
  readonly chain: readonly ChainEntry[];
  readonly requirements: Requirements;
  readonly writes: WritesSettings;
}

/** @param names  the channels' names in the order of the file, which a plain object does not keep */
export function asPipeline(file: File, names: readonly string[]): Pipeline {
  const { about, channels, chain, ...rest } = file;
  return {
    ...rest,
    ...(about === undefined ? {} : { about }),
    channels: names.map((channelName) => ({ name: channelName, ...channels[channelName]! })),
    chain: chain.map((entry, index) => {
      const { stage, ...settings } = entry as { stage: string; channels?: string[] };
      return {
        stage,
        settings,
        ...(settings.channels === undefined ? {} : { channels: settings.channels }),
        index,
      };
    }),
  };
}

/** JSON Schema (draft 2020-12) of the pipeline file, for editors. */
export function pipelineJsonSchema(stages: StageSchemas): JsonSchema {
  const { $schema, ...rest } = jsonSchemaOf(pipelineSchema(stages));
  return { $schema, title: "forebay pipeline", ...rest };
}
