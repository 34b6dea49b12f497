/**
 * The contract between the log readers and the engine: rows of one series in order of time, as columns.
 */
import type { Diagnostic } from "../diagnostics.ts";

/** A run of rows. Arrays may be longer than `count`; the engine must not keep them after the next block. */
export interface RowBlock {
  readonly count: number;
  /** Integer microseconds since 1970-01-01T00:00:00Z, strictly increasing over the whole series. */
  readonly times: Float64Array;
  /** One array per channel, in the order of `ReadRequest.channels`; NaN is missing. */
  readonly columns: readonly Float64Array[];
}

/** One log file: where to open it, and the name that accounts and diagnostics show. */
export interface LogFile {
  readonly path: string;
  /** Path relative to the pipeline file, with forward slashes. */
  readonly name: string;
}

export interface ChannelColumn {
  /** The channel's name in the pipeline. */
  readonly name: string;
  /** The column's name in the log's header line. */
  readonly column: string;
}

/**
 * How the time cells are written: one of the names, or a Unicode date pattern such as `dd/MM/yyyy HH:mm:ss.SSS`
 * (with `seconds-of-day` and `decimal-day` as further words). `elapsed-…` counts from `TimeSettings.start`;
 * `serial-day-1900` and `serial-day-1904` are the days of spreadsheets.
 */
export type TimeForm = "iso-8601" | "unix-s" | "unix-ms" | "unix-us" | "unix-ns" | (string & {});

/** How the clock of a log is read. */
export interface TimeSettings {
  /** One column, or several whose cells are put together with a blank between them: [Date, Time]. */
  readonly column: string | readonly string[];
  /** Found from the cells when left out; where that is not certain, the reader asks. */
  readonly form?: TimeForm;
  /** IANA name or a fixed offset (+01:00) of cells that carry no offset. */
  readonly zone?: string;
  /** First of the hundred years that two-digit years stand for; 1970 when left out. */
  readonly pivot?: number;
  /** Date of the first row, yyyy-MM-dd, for cells that hold the time of day only. */
  readonly date?: string;
  /** ISO 8601 time with offset at which an elapsed count is zero. */
  readonly start?: string;
  /** The count starts again from zero at this value, in its own unit. */
  readonly rollover?: number;
}

export interface LogLayout {
  readonly separator?: string;
  readonly decimalSign?: "." | ",";
  /** Sign between groups of three digits; found from the file when left out. */
  readonly thousandsSign?: string;
  readonly encoding?: string;
  /** 1-based physical line that holds the column names. */
  readonly namesLine?: number;
  /** 1-based physical line of the first data row. */
  readonly dataFromLine?: number;
}

export interface ReadRequest {
  readonly files: readonly LogFile[];
  readonly channels: readonly ChannelColumn[];
  readonly time: TimeSettings;
  /** Codes for a missing value; a numeric code matches in every spelling (-9999, -9999.0, -9.999e3). */
  readonly missing: readonly string[];
  readonly layout: LogLayout;
  /** Rows up to this much late (microseconds) are put in their place; later ones are set aside. */
  readonly lateBy_us: number;
}

/** Rows set aside for one reason. */
export interface SetAside {
  count: number;
  /** Physical 1-based line numbers of the first few, header included. */
  readonly firstLines: number[];
}

/** What became of the rows of one file; read = used + merged + the sum of set aside. */
export interface RowAccount {
  read: number;
  used: number;
  /** Rows whose time and values repeat another row's (or fill its missing cells). */
  merged: number;
  readonly setAside: Map<string, SetAside>;
  /** Rows that came late but within the horizon and were put in their place. */
  reordered: { count: number; readonly firstLines: number[] };
  /**
   * Per channel: cells that are empty or a missing code, and cells that could not be read as a number; counted in
   * every row whose time was read, whatever became of the row.
   */
  readonly missingCells: number[];
  readonly unreadableCells: { count: number; readonly firstLines: number[] }[];
}

export interface FileAccount {
  readonly file: string;
  readonly bytes: number;
  readonly sha256: string;
  readonly rows: RowAccount;
  /** What was found about the file's layout, in plain words, for the account. */
  readonly found: Record<string, string>;
}

/** Rows of the series as they come, and (once they are all read) the accounts of the files. */
export interface LogReading {
  readonly blocks: AsyncIterable<RowBlock>;
  /** Complete after `blocks` has been read to its end; in the order of the request's files. */
  accounts(): FileAccount[];
  /** Files that could not be read at all, and warnings; the other files are read all the same. */
  diagnostics(): Diagnostic[];
}

/** Reads one series. */
export type ReadLogs = (request: ReadRequest) => LogReading;
