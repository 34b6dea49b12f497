/** Every diagnostic that a log file can give rise to, made in one place. */
import { type Diagnostic, nearestName, quoted } from "../diagnostics.ts";

export interface Place {
  readonly line: number;
  readonly column: number;
}

/** A log whose rows cannot be read; the other logs are read all the same. */
export class LogProblem extends Error {
  readonly diagnostic: Diagnostic;
  constructor(diagnostic: Diagnostic) {
    super(diagnostic.problem);
    this.name = "LogProblem";
    this.diagnostic = diagnostic;
  }
}

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

  timesUnreadable: (file: string, cell: string, line: number, form: string) =>
    problem(file, "no-readable-time", `no time in this log reads as ${form}`, {
      line,
      column: 1,
      given: quoted(cell),
      todo: "set time: form in the pipeline to the form that these times are written in",
    }),

  decimalSignUnclear: (file: string, cell: string, line: number) =>
    problem(file, "decimal-sign-unclear", "it is not certain what the comma in the numbers means", {
      line,
      column: 1,
      given: quoted(cell),
      allowed: '"." or ","',
      todo: "add layout: decimal-sign to the pipeline",
    }),

  noUsableRows: (file: string, reasons: string, line: number) =>
    problem(file, "no-usable-rows", "every row of this log was set aside", {
      line,
      column: 1,
      given: reasons,
      todo: "compare the first rows with time, channels and layout in the pipeline",
    }),
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
