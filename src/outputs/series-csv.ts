import { stringify } from "csv-stringify/sync";
import { type Grid, timeOf } from "../signal/grid.ts";
import { STATE_FLAGS, stateOf } from "../signal/marks.ts";
import { isoTimeWriter, timeFractionDigits, valueText } from "./cell-text.ts";
import type { PendingFile } from "./publish.ts";

export interface SeriesCsvOptions {
  readonly grid: Grid;
  readonly channels: readonly string[];
  /** Significant digits; undefined for shortest exact. */
  readonly digits: number | undefined;
  /** A `_flag` column beside each channel. */
  readonly flags: boolean;
}

/** Writes grid samples of several channels as CSV: `time`, then per channel its value and its flag. */
export class SeriesCsv {
  rows = 0;
  firstTime_us: number | null = null;
  lastTime_us: number | null = null;
  private readonly file: PendingFile;
  private readonly options: SeriesCsvOptions;
  private readonly text;
  private readonly time;

  constructor(file: PendingFile, options: SeriesCsvOptions) {
    this.file = file;
    this.options = options;
    this.text = valueText(options.digits);
    this.time = isoTimeWriter(timeFractionDigits(options.grid));
    const names = options.channels.flatMap((name) => (options.flags ? [name, `${name}_flag`] : [name]));
    file.write(stringify([["time", ...names]]));
  }

  /** Rows first … first + count - 1; one array of values and of marks a channel. */
  write(first: number, count: number, values: readonly Float64Array[], marks: readonly Uint8Array[]): void {
    if (count === 0) return;
    const { grid, flags } = this.options;
    const records: string[][] = [];
    for (let i = 0; i < count; i++) {
      const record = [this.time(timeOf(grid, first + i))];
      for (let c = 0; c < values.length; c++) {
        record.push(this.text(values[c]![i]!));
        if (flags) record.push(String(STATE_FLAGS[stateOf(marks[c]![i]!)]));
      }
      records.push(record);
    }
    this.file.write(stringify(records));
    this.firstTime_us ??= timeOf(grid, first);
    this.lastTime_us = timeOf(grid, first + count - 1);
    this.rows += count;
  }
}
