/** Every diagnostic that a log file can give rise to, made in one place. */
import { type Diagnostic, nearestName, quoted } from "../diagnostics.ts";

export interface Place {
  readonly line: number;
  readonly column: number;
}

/** A log whose rows cannot be read; the other logs are read all the same. */
export class LogProblem extends Error {
  readonly diagnostic: Diagnostic;
  /** Time forms between which the log does not decide. */
  forms?: readonly string[];
  constructor(diagnostic: Diagnostic) {
    super(diagnostic.problem);
    this.name = "LogProblem";
    this.diagnostic = diagnostic;
  }
}

/** Another log of the same series may answer this one. */
export const DATE_ORDER_UNCLEAR = "date-order-unclear";

type Parts = Partial<Pick<Diagnostic, "given" | "allowed" | "todo" | "severity"> & Place>;

function problem(file: string, code: string, text: string, parts: Parts): LogProblem {
  return new LogProblem({ code, severity: "error", file, line: 0, column: 0, problem: text, ...parts });
}

export const logProblems = {
  cannotOpen: (file: string, why: string) =>
    problem(file, "log-cannot-be-opened", "the log cannot be opened", {
      given: why,
      todo: "check the path and the permissions, or leave the file out",
    }),

  damaged: (file: string, why: string, rows: number) =>
    problem(file, "log-damaged", "the log breaks off: what follows the damage cannot be read", {
      given: `${quoted(why)}, after ${rows} rows`,
      todo: "fetch the file again from the logger; the rows before the damage were read",
    }),

  empty: (file: string) =>
    problem(file, "log-empty", "the file is empty", {
      given: "0 bytes",
      allowed: "a line of column names and at least one row",
      todo: "fetch the file again from the logger, or leave it out",
    }),

  notText: (file: string, what: string) =>
    problem(file, "log-not-text", "this is not a text file", {
      given: what,
      allowed: "comma, semicolon or tab separated text, plain or gzip-compressed",
      todo: "export the log as text, or leave the file out",
    }),

  unknownEncoding: (file: string, given: string) =>
    problem(file, "encoding-unknown", "the encoding is not known", {
      given: quoted(given),
      allowed:
        "utf-8, utf-16le, utf-16be, iso-8859-1, windows-1252 and the other names of the WHATWG Encoding Standard",
      todo: "correct layout: encoding in the pipeline, or leave it out",
    }),

  noRows: (file: string, line: number) =>
    problem(file, "log-without-rows", "there are column names but no data rows", {
      line,
      column: 1,
      todo: "fetch the file again from the logger, or leave it out",
    }),

  noTimeColumn: (file: string, column: string, names: readonly string[], line: number) =>
    problem(file, "time-column-missing", `there is no column named ${quoted(column)} for the time`, {
      line,
      column: 1,
      given: namesShown(names),
      ...hint(column, names),
      todo: `set time: column to one of these names${names.length > 0 && names.every(looksLikeData) ? "; the first line looks like data, and a log needs a line of names" : ""}`,
    }),

  noChannelColumn: (file: string, column: string, names: readonly string[], line: number) =>
    problem(file, "channel-column-missing", `there is no column named ${quoted(column)}`, {
      line,
      column: 1,
      given: namesShown(names),
      ...hint(column, names),
      todo: "correct the channel's column in the pipeline, or leave the file out",
    }),

  columnTwice: (file: string, column: string, line: number) =>
    problem(file, "column-twice", `the name ${quoted(column)} stands above more than one column`, {
      line,
      column: 1,
      todo: "rename one of the columns in the log, so that it is certain which one is meant",
    }),

  zoneNeeded: (file: string, cell: string, line: number) =>
    problem(file, "zone-needed", "the times carry no offset from UTC, and no zone is set", {
      line,
      column: 1,
      given: quoted(cell),
      allowed: "UTC, or another IANA zone name such as Europe/Lisbon",
      todo: "add time: zone to the pipeline",
    }),

  timesUnreadable: (file: string, cell: string, line: number, form: string, looksLike: string | undefined) =>
    problem(file, "no-readable-time", `no time in this log reads as ${form}`, {
      line,
      column: 1,
      given: quoted(cell),
      ...(looksLike === undefined ? {} : { allowed: `the cells look like ${looksLike}` }),
      todo: "set time: form in the pipeline to the form that these times are written in",
    }),

  dateOrderUnclear: (file: string, cell: string, forms: readonly string[], line: number) => {
    const asked = problem(file, DATE_ORDER_UNCLEAR, "it is not certain which part of the date is the day", {
      line,
      column: 1,
      given: quoted(cell),
      allowed: forms.join("; or "),
      todo: "set time: form in the pipeline to the one that is meant",
    });
    asked.forms = forms;
    return asked;
  },

  timeSetting: (file: string, setting: string, why: string, form: string) =>
    problem(file, `time-${setting}-needed`, why, {
      given: `time: form ${quoted(form)}`,
      allowed: TIME_SETTINGS[setting] ?? "",
      todo: `set time: ${setting} in the pipeline`,
    }),

  decimalSignUnclear: (file: string, cell: string, line: number) =>
    problem(file, "decimal-sign-unclear", "it is not certain what the comma in the numbers means", {
      line,
      column: 1,
      given: quoted(cell),
      allowed: '"." or ","',
      todo: "add layout: decimal-sign to the pipeline",
    }),

  suspectCode: (file: string, column: string, value: number, count: number, line: number): Diagnostic =>
    problem(
      file,
      "suspect-missing-code",
      `${value} in ${quoted(column)} looks like a code for a missing value`,
      {
        severity: "warning",
        line,
        column: 1,
        given: `${count} ${count === 1 ? "cell" : "cells"}, read as values`,
        todo: "add it to missing in the pipeline, unless it was measured",
      },
    ).diagnostic,

  manySetAside: (file: string, read: number, reasons: string, line: number): Diagnostic =>
    problem(file, "many-rows-set-aside", "more than half of the rows of this log were set aside", {
      severity: "warning",
      line,
      column: 1,
      given: `${read} rows, ${reasons}`,
      todo: "compare the first of these rows with time, channels and layout in the pipeline",
    }).diagnostic,

  noUsableRows: (file: string, reasons: string, line: number) =>
    problem(file, "no-usable-rows", "every row of this log was set aside", {
      line,
      column: 1,
      given: reasons,
      todo: "compare the first rows with time, channels and layout in the pipeline",
    }),
};

const TIME_SETTINGS: Record<string, string> = {
  form: "iso-8601, unix-s, unix-ms, unix-us, unix-ns, elapsed-s and so on, or a Unicode date pattern",
  zone: "an IANA zone name such as Europe/Lisbon, or a fixed offset such as +01:00",
  date: "the date of the first row, such as 2031-03-04",
  start: "an ISO 8601 time with offset, such as 2031-03-04T00:00:00Z",
  rollover: "a whole number, such as 4294967296",
};

function namesShown(names: readonly string[]): string {
  return names.length === 0 ? "no line of column names was found" : quoted(names.join(", "));
}

function hint(column: string, names: readonly string[]): { allowed?: string } {
  const nearest = nearestName(column, names);
  if (nearest !== undefined) return { allowed: `the nearest name in the log is ${quoted(nearest)}` };
  return {};
}

function looksLikeData(name: string): boolean {
  return /^[\d.,:TZ+\-/ ]*$/.test(name);
}
