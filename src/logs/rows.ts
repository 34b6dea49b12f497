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

/** How the time cells are written. More forms come with more clocks. */
export type TimeForm = "iso-8601" | "unix-s" | "unix-ms" | "unix-us" | "unix-ns" | (string & {});

export interface LogLayout {
  readonly separator?: string;
  readonly decimalSign?: "." | ",";
  readonly encoding?: string;
  /** 1-based physical line that holds the column names. */
  readonly namesLine?: number;
  /** 1-based physical line of the first data row. */
  readonly dataFromLine?: number;
}

export interface ReadRequest {
  readonly files: readonly LogFile[];
  readonly channels: readonly ChannelColumn[];
  readonly time: { readonly column: string; readonly form: TimeForm; readonly zone?: string };
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
  /** Per channel: cells that are empty or a missing code, and cells that could not be read as a number. */
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
