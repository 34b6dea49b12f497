import { closeSync, fsyncSync, openSync, writeSync } from "node:fs";
import { join } from "node:path";

/** One line of runs.jsonl: the only file with clock times. */
export interface RunLine {
  readonly started: string;
  readonly ended: string;
  readonly name: string;
  readonly logger: string | null;
  readonly software: string;
  readonly pipeline_sha256: string;
  readonly first: string | null;
  readonly last: string | null;
  readonly rows: number;
  readonly met: boolean;
  readonly outputs: readonly { readonly file: string; readonly sha256: string }[];
}

/** Adds a line to the folder's runs.jsonl, in one write so that lines never mix. */
export function appendRun(folder: string, line: RunLine): void {
  const handle = openSync(join(folder, "runs.jsonl"), "a", 0o666);
  try {
    writeSync(handle, `${JSON.stringify(line)}\n`);
    fsyncSync(handle);
  } finally {
    closeSync(handle);
  }
}
