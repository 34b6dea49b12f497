import type { ByteSource } from "./byte-source.ts";
import { cellsOf } from "./cells.ts";
import { findClockSet } from "./clock-set.ts";
import { type FoundForm, findTimeForm } from "./find-time-form.ts";
import { type LogHead, readHead } from "./head.ts";
import { type Columns, findColumns, findNames, type NamesLine, timeText } from "./layout.ts";
import { logProblems } from "./log-problems.ts";
import { MissingCodes } from "./missing-codes.ts";
import { countNoteRows, type SampleRow } from "./note-rows.ts";
import { findNumberFormat, type NumberFormat } from "./number-format.ts";
import { type RecordBatch, RecordSplitter } from "./record-splitter.ts";
import type { LogFile, ReadRequest, TimeForm } from "./rows.ts";
import type { Encoding } from "./text-decoding.ts";
import { TimeReader } from "./time-reader.ts";

/** Text looked at to find the layout, and to find out whether 03/04 is in March or in April. */
const HEAD_BYTES = 1 << 16;
const LONG_HEAD_BYTES = 1 << 24;
/** Rows whose numbers are looked at. */
const NUMBER_ROWS = 200;

/** What is known of a log before its rows are read. */
export interface ProbedLog {
  readonly file: LogFile;
  readonly encoding: Encoding;
  readonly separator: string;
  readonly columns: Columns;
  readonly numbers: NumberFormat;
  readonly namesLine: number;
  readonly dataFromLine: number;
  readonly form: TimeForm;
  /** Earliest time among the first rows; -Infinity when none of them has a readable time. */
  readonly firstTime_us: number;
  /** Rows above this line were written before the clock was set; 0 when there are none. */
  readonly clockSetLine: number;
  readonly found: Record<string, string>;
}

/** Names of the signs, for the account. */
const SIGNS: Record<string, string> = {
  ",": "comma",
  ".": "point",
  ";": "semicolon",
  "\t": "tab",
  " ": "blank",
};

/**
 * Looks at the first lines of a log and finds its layout, from them and from what the pipeline says.
 * @throws LogProblem when the log cannot be read, or the layout is not certain
 */
export async function probeLog(file: LogFile, request: ReadRequest, source: ByteSource): Promise<ProbedLog> {
  const { layout } = request;
  const head = await readHead(file, source, layout.encoding, HEAD_BYTES);
  const names = findNames(file.name, head.text.split(/\r\n|\n|\r/), request);
  const columns = findColumns(file.name, names, request);
  let rows = sampleRows(head, names.separator, layout.dataFromLine ?? names.after);
  if (rows.length === 0 && head.whole) throw logProblems.noRows(file.name, names.line);
  let form = request.time.form;
  if (form === undefined) {
    let found = findTimeForm(timeCells(rows, columns), request.time);
    if (found.kind === "unclear" && !head.whole) {
      const long = await readHead(file, source, layout.encoding, LONG_HEAD_BYTES);
      const more = sampleRows(long, names.separator, layout.dataFromLine ?? names.after);
      found = findTimeForm(timeCells(more, columns), request.time, found.forms);
    }
    form = foundForm(file.name, found, rows[0]!.line);
  }
  const missing = new MissingCodes(request.missing);
  const noteRows =
    layout.dataFromLine === undefined
      ? countNoteRows(rows, columns, timeReader(file.name, form, request), missing)
      : 0;
  const notes = rows.slice(0, noteRows);
  rows = rows.slice(noteRows);
  const numbers = findNumberFormat(
    file.name,
    columns.channelIndexes.map((c) =>
      rows
        .slice(0, NUMBER_ROWS)
        .flatMap(({ line, cells }) => (cells[c] === undefined ? [] : [{ line, cell: cells[c] }])),
    ),
    layout,
    missing,
  );
  return {
    file,
    encoding: head.encoding,
    separator: names.separator,
    columns,
    numbers,
    namesLine: names.line,
    dataFromLine: layout.dataFromLine ?? (notes.length > 0 ? notes.at(-1)!.line + 1 : names.after),
    form,
    ...readFirstTimes(file.name, rows, columns, form, request),
    found: inWords(head, names, notes, numbers, form, request),
  };
}

/** A reader for the times of one log. @throws LogProblem when the settings lack what the form needs */
export function timeReader(name: string, form: TimeForm, request: ReadRequest): TimeReader {
  const reader = TimeReader.make(form, request.time);
  if (!(reader instanceof TimeReader)) throw logProblems.timeSetting(name, reader.setting, reader.why, form);
  return reader;
}

function sampleRows(head: LogHead, separator: string, fromLine: number): SampleRow[] {
  const rows: SampleRow[] = [];
  const splitter = new RecordSplitter({
    separator,
    comments: true,
    fromLine,
    onRefused: (line) => rows.push({ line, cells: [] }),
    onComment: () => {},
  });
  const take = (batch: RecordBatch | null): void => {
    if (batch === null) return;
    cellsOf(batch, separator).forEach((cells, i) => {
      rows.push({ line: batch.lines[i]!, cells: cells ?? [] });
    });
  };
  // A batch is valid only until the splitter is asked again.
  take(splitter.push(Buffer.from(head.text)));
  take(splitter.end());
  return rows.sort((a, b) => a.line - b.line);
}

function timeCells(rows: readonly SampleRow[], { timeIndexes, names }: Columns): string[] {
  const again = timeIndexes.map((i) => names[i]).join(" ");
  return rows.flatMap(({ cells }) => {
    const text = timeText(cells, timeIndexes);
    return text === undefined || text === again ? [] : [text];
  });
}

function foundForm(name: string, found: FoundForm, line: number): TimeForm {
  if (found.kind === "found") return found.form;
  if (found.kind === "unclear") throw logProblems.dateOrderUnclear(name, found.cell, found.forms, line);
  if (found.kind === "no-date")
    throw logProblems.timeSetting(name, "date", "the cells hold the time of day without a date", found.form);
  throw logProblems.timesUnreadable(name, found.cell, line, "a form that is known", undefined);
}

/**
 * The earliest of the first times, and where the clock was set if it started from an epoch.
 * @throws LogProblem when no time can be read
 */
function readFirstTimes(
  name: string,
  rows: readonly SampleRow[],
  columns: Columns,
  form: TimeForm,
  request: ReadRequest,
): { firstTime_us: number; clockSetLine: number } {
  const times = timeReader(name, form, request);
  const read: { line: number; time: number }[] = [];
  let unreadable: { cell: string; line: number } | undefined;
  let local: { cell: string; line: number } | undefined;
  for (const { line, cells } of rows) {
    const cell = timeText(cells, columns.timeIndexes);
    if (cell === undefined) continue;
    const time = times.time(cell);
    if (!Number.isNaN(time)) read.push({ line, time });
    else if (times.problem === "time-without-offset") local ??= { cell, line };
    else unreadable ??= { cell, line };
  }
  if (read.length > 0) {
    const clockSetLine = findClockSet(read);
    let first = Number.POSITIVE_INFINITY;
    for (const { line, time } of read) if (line >= clockSetLine) first = Math.min(first, time);
    return { firstTime_us: first, clockSetLine };
  }
  if (local !== undefined) throw logProblems.zoneNeeded(name, local.cell, local.line);
  if (unreadable === undefined) return { firstTime_us: Number.NEGATIVE_INFINITY, clockSetLine: 0 };
  const found = findTimeForm(timeCells(rows, columns), request.time);
  const looksLike = found.kind === "found" ? found.form : undefined;
  throw logProblems.timesUnreadable(name, unreadable.cell, unreadable.line, form, looksLike);
}

function inWords(
  head: LogHead,
  names: NamesLine,
  notes: readonly SampleRow[],
  numbers: NumberFormat,
  form: TimeForm,
  request: ReadRequest,
): Record<string, string> {
  const { layout, time, channels } = request;
  const set = (given: unknown): string => (given === undefined ? "" : ", as set in the pipeline");
  const found: Record<string, string> = {};
  if (head.packed) found["compression"] = "gzip";
  found["encoding"] = head.encoding.found;
  found["separator"] = (SIGNS[names.separator] ?? JSON.stringify(names.separator)) + set(layout.separator);
  found["decimal sign"] = SIGNS[numbers.decimalSign] + set(layout.decimalSign);
  if (numbers.thousandsSign !== null)
    found["thousands sign"] =
      (SIGNS[numbers.thousandsSign] ?? JSON.stringify(numbers.thousandsSign)) + set(layout.thousandsSign);
  numbers.suffixes.forEach((suffix, c) => {
    if (suffix !== null) found[`unit in the cells of ${channels[c]!.name}`] = suffix;
  });
  found["names line"] = `line ${names.line}${set(layout.namesLine)}`;
  if (notes.length > 0)
    found["rows between names and data"] = `${notes.map((row) => row.line).join(", ")} (units or notes)`;
  found["time"] = time.form === undefined ? `${form}, found from the cells` : form + set(time.form);
  if (time.zone !== undefined) found["zone"] = `${time.zone} where a cell carries no offset`;
  return found;
}
