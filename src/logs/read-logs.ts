import type { Diagnostic } from "../diagnostics.ts";
import { type ByteSource, digestOf, fromDisk } from "./byte-source.ts";
import { LogProblem, logProblems } from "./log-problems.ts";
import { LogRows } from "./log-rows.ts";
import { type MergeInput, mergeLogs } from "./merge-logs.ts";
import { messageOf, type ProbedLog, probeLog } from "./probe.ts";
import { newRowAccount } from "./row-account.ts";
import type { FileAccount, LogReading, ReadRequest, RowAccount, RowBlock } from "./rows.ts";

/**
 * Reads the logs of one series as rows in strict order of time. The files are read in the order of their first
 * times; where they overlap, their rows are merged. A log that cannot be read makes a diagnostic and stops
 * nothing else. Rows and accounts do not depend on how the bytes come in pieces.
 * @param source  gives the bytes of a file; the file system by default
 */
export function readLogs(request: ReadRequest, source: ByteSource = fromDisk): LogReading {
  const reading = new SeriesReading(request, source);
  return {
    blocks: reading.blocks(),
    accounts: () => reading.accounts(),
    diagnostics: () => reading.diagnostics,
  };
}

class SeriesReading {
  readonly diagnostics: Diagnostic[] = [];
  private readonly request: ReadRequest;
  private readonly source: ByteSource;
  private readonly byFile = new Map<number, () => FileAccount>();

  constructor(request: ReadRequest, source: ByteSource) {
    this.request = request;
    this.source = source;
  }

  accounts(): FileAccount[] {
    return [...this.byFile.entries()].sort(([a], [b]) => a - b).map(([, account]) => account());
  }

  async *blocks(): AsyncGenerator<RowBlock> {
    const { request } = this;
    const inputs: MergeInput[] = [];
    for (const [index, file] of request.files.entries()) {
      let probed: ProbedLog;
      try {
        probed = await probeLog(file, request, this.source);
      } catch (error) {
        await this.refuse(index, error);
        continue;
      }
      const rows = new LogRows(probed, request, this.source);
      this.byFile.set(index, () => rows.account());
      inputs.push({ rows, notBefore_us: probed.firstTime_us - request.lateBy_us });
    }
    // Array sort is stable: logs with the same first time stay in the order of the request.
    inputs.sort((a, b) => compare(a.notBefore_us, b.notBefore_us));
    yield* mergeLogs(inputs, request.channels.length);
    for (const { rows } of inputs) this.verdict(rows);
  }

  /** Notes why a log cannot be read; its digest is kept all the same, since it was an input. */
  private async refuse(index: number, error: unknown): Promise<void> {
    const file = this.request.files[index]!;
    const { diagnostic } =
      error instanceof LogProblem ? error : logProblems.cannotOpen(file.name, messageOf(error));
    this.diagnostics.push(diagnostic);
    try {
      const digest = await digestOf(this.source(file));
      const rows = newRowAccount(this.request.channels.length);
      const found = { "not read": diagnostic.problem };
      this.byFile.set(index, () => ({ file: file.name, ...digest, rows, found }));
    } catch {
      // What cannot be opened has no digest; the diagnostic says so.
    }
  }

  private verdict(log: LogRows): void {
    if (log.problem !== null) this.diagnostics.push(log.problem.diagnostic);
    const { rows } = log;
    if (rows.used + rows.merged > 0 || log.problem !== null) return;
    const { file } = log.account();
    if (rows.read === 0) {
      this.diagnostics.push(logProblems.noRows(file, log.namesLine).diagnostic);
      return;
    }
    const first = [...rows.setAside.values()].flatMap((s) => s.firstLines);
    this.diagnostics.push(
      logProblems.noUsableRows(file, reasonsInWords(rows), Math.min(...first, Number.MAX_SAFE_INTEGER))
        .diagnostic,
    );
  }
}

function reasonsInWords(rows: RowAccount): string {
  return [...rows.setAside.entries()].map(([reason, { count }]) => `${count} ${reason}`).join(", ");
}

function compare(a: number, b: number): number {
  return a < b ? -1 : a > b ? 1 : 0;
}
