import { parse } from "csv-parse/sync";
import type { RecordBatch } from "./record-splitter.ts";

/** The cells of one record, or null where its quoting cannot be read. */
export type Cells = readonly string[] | null;

/**
 * Splits each record of a batch into its cells (RFC 4180, cells trimmed of blanks around them).
 * Cells stay text: what they mean is decided by the time and number readers.
 */
export function cellsOf(batch: RecordBatch, separator: string): Cells[] {
  const options = {
    delimiter: separator,
    record_delimiter: ["\r\n", "\n", "\r"],
    relax_quotes: true,
    relax_column_count: true,
    trim: true,
  };
  const { bytes, ends } = batch;
  try {
    const records = parse(bytes, options);
    if (records.length === ends.length) return records;
  } catch {
    // One record with broken quotes spoils the batch; its neighbours are read singly below.
  }
  return ends.map((end, i) => {
    try {
      const records = parse(bytes.subarray(i === 0 ? 0 : ends[i - 1]!, end), options);
      return records.length === 1 ? records[0]! : null;
    } catch {
      return null;
    }
  });
}
