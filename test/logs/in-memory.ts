import type { Diagnostic } from "../../src/diagnostics.ts";
import type { ByteSource } from "../../src/logs/byte-source.ts";
import { readLogs } from "../../src/logs/read-logs.ts";
import type { FileAccount, ReadRequest, RowAccount } from "../../src/logs/rows.ts";
import { type ClockSettings, TimeReader } from "../../src/logs/time-reader.ts";

export interface ReadResult {
  /** Time in microseconds, then one value a channel. */
  readonly rows: number[][];
  readonly accounts: FileAccount[];
  readonly diagnostics: Diagnostic[];
}

type Settings = Partial<Omit<ReadRequest, "files" | "channels">> & { readonly channels?: readonly string[] };

/** Reads logs held in memory, in pieces of `chunk` bytes. */
export async function readTexts(
  texts: Record<string, string | Uint8Array>,
  settings: Settings = {},
  chunk = 65_536,
): Promise<ReadResult> {
  const source: ByteSource = async function* (file) {
    const bytes = Buffer.from(texts[file.name]!);
    for (let at = 0; at < bytes.length; at += chunk) yield bytes.subarray(at, at + chunk);
  };
  return readAll(
    {
      time: { column: "time", form: "iso-8601" },
      missing: [],
      layout: {},
      lateBy_us: 600e6,
      ...settings,
      files: Object.keys(texts).map((name) => ({ path: name, name })),
      channels: (settings.channels ?? ["a"]).map((column) => ({ name: column, column })),
    },
    source,
  );
}

export async function readAll(request: ReadRequest, source?: ByteSource): Promise<ReadResult> {
  const reading = source === undefined ? readLogs(request) : readLogs(request, source);
  const rows: number[][] = [];
  for await (const block of reading.blocks)
    for (let i = 0; i < block.count; i++)
      rows.push([block.times[i]!, ...block.columns.map((column) => column[i]!)]);
  return { rows, accounts: reading.accounts(), diagnostics: reading.diagnostics() };
}

/** Counts and first lines of the rows set aside, by reason. */
export function asideOf(rows: RowAccount): Record<string, number[]> {
  return Object.fromEntries([...rows.setAside].map(([reason, { firstLines }]) => [reason, [...firstLines]]));
}

/** read − (used + merged + set aside): zero when the books close. */
export function imbalance(rows: RowAccount): number {
  let aside = 0;
  for (const { count } of rows.setAside.values()) aside += count;
  return rows.read - rows.used - rows.merged - aside;
}

export const iso = (time_us: number): string => new Date(time_us / 1000).toISOString();

export function readerOf(form: string, settings: ClockSettings = {}): TimeReader {
  const reader = TimeReader.make(form, settings);
  if (!(reader instanceof TimeReader)) throw new Error(reader.why);
  return reader;
}
