import type { LogRows } from "./log-rows.ts";
import { absorb, countUsed, firstAtOrAfter, type SortedRows } from "./reorder-buffer.ts";
import { setAside } from "./row-account.ts";
import type { RowAccount, RowBlock } from "./rows.ts";

const BLOCK_ROWS = 8_192;

/** One log of a series, opened when its time comes. */
export interface MergeInput {
  readonly rows: LogRows;
  /** No row of the log has an earlier time. */
  readonly notBefore_us: number;
}

interface OpenLog {
  readonly account: RowAccount;
  readonly iterator: AsyncIterator<SortedRows>;
  block: SortedRows;
  at: number;
}

/**
 * Puts the rows of several logs of one series into one order of time. Only logs that overlap are open together.
 * Where two have a row of the same time, the log that comes first in `inputs` keeps its row.
 * @param inputs  ordered by `notBefore_us`
 */
export async function* mergeLogs(inputs: readonly MergeInput[], channels: number): AsyncGenerator<RowBlock> {
  const out = new BlockBuilder(channels);
  const open: OpenLog[] = [];
  let next = 0;
  try {
    for (;;) {
      while (next < inputs.length && (open.length === 0 || inputs[next]!.notBefore_us <= earliest(open))) {
        const { rows } = inputs[next++]!;
        const iterator = rows.sorted()[Symbol.asyncIterator]();
        const log: OpenLog = { account: rows.rows, iterator, block: NO_ROWS, at: 0 };
        if (await advance(log)) open.push(log);
      }
      if (open.length === 0) break;
      const time = earliest(open);
      const first = open.find((log) => log.block.times[log.at] === time)!;
      let until = next < inputs.length ? inputs[next]!.notBefore_us : Number.POSITIVE_INFINITY;
      for (const log of open) if (log !== first) until = Math.min(until, log.block.times[log.at]!);
      if (time <= out.last_us) {
        setAside(first.account, "late", first.block.lines[first.at]!);
        first.at++;
      } else if (until <= time) {
        // Other logs have a row of the same time.
        if (out.count === BLOCK_ROWS) yield out.take();
        countUsed(first.account, first.block, first.at, first.at + 1);
        out.append(first.block, first.at, first.at + 1);
        first.at++;
        for (const log of open) {
          if (log === first || log.block.times[log.at] !== time) continue;
          absorb(
            out.columns,
            out.count - 1,
            log.block.columns,
            log.at,
            log.block.lines[log.at]!,
            log.account,
          );
          log.at++;
          if (log.at === log.block.count) await advance(log);
        }
      } else {
        const end = firstAtOrAfter(first.block.times, first.at, first.block.count, until);
        countUsed(first.account, first.block, first.at, end);
        while (first.at < end) {
          if (out.count === BLOCK_ROWS) yield out.take();
          const to = Math.min(end, first.at + BLOCK_ROWS - out.count);
          out.append(first.block, first.at, to);
          first.at = to;
        }
      }
      for (let i = open.length - 1; i >= 0; i--) {
        const log = open[i]!;
        if (log.at === log.block.count && !(await advance(log))) open.splice(i, 1);
      }
    }
    if (out.count > 0) yield out.take();
  } finally {
    for (const log of open) await log.iterator.return?.();
  }
}

const NO_ROWS: SortedRows = {
  count: 0,
  times: new Float64Array(0),
  lines: new Float64Array(0),
  moved: new Uint8Array(0),
  columns: [],
};

async function advance(log: OpenLog): Promise<boolean> {
  const result = await log.iterator.next();
  log.at = 0;
  log.block = result.done === true ? NO_ROWS : result.value;
  return result.done !== true;
}

function earliest(open: readonly OpenLog[]): number {
  let time = Number.POSITIVE_INFINITY;
  for (const log of open) if (log.at < log.block.count) time = Math.min(time, log.block.times[log.at]!);
  return time;
}

/** Collects rows into blocks; the arrays are filled again after each block has been used. */
class BlockBuilder {
  count = 0;
  last_us = Number.NEGATIVE_INFINITY;
  readonly columns: readonly Float64Array[];
  private readonly times = new Float64Array(BLOCK_ROWS);

  constructor(channels: number) {
    this.columns = Array.from({ length: channels }, () => new Float64Array(BLOCK_ROWS));
  }

  append(rows: SortedRows, from: number, to: number): void {
    this.times.set(rows.times.subarray(from, to), this.count);
    this.columns.forEach((column, c) => {
      column.set(rows.columns[c]!.subarray(from, to), this.count);
    });
    this.count += to - from;
    if (to > from) this.last_us = rows.times[to - 1]!;
  }

  take(): RowBlock {
    const block = { count: this.count, times: this.times, columns: this.columns };
    this.count = 0;
    return block;
  }
}
