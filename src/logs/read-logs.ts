import type { Diagnostic } from "../diagnostics.ts";
import { type ByteSource, digestOf, fromDisk } from "./byte-source.ts";
import { DATE_ORDER_UNCLEAR, LogProblem } from "./log-problems.ts";
import { LogRows } from "./log-rows.ts";
import { type MergeInput, mergeLogs } from "./merge-logs.ts";
import { type ProbedLog, probeLog } from "./probe.ts";
import { newRowAccount } from "./row-account.ts";
import type { FileAccount, LogReading, ReadRequest, RowBlock } from "./rows.ts";

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
    for (const { index, log } of await this.probeAll()) {
      const rows = new LogRows(log, request, this.source);
      this.byFile.set(index, () => rows.account());
      inputs.push({ rows, notBefore_us: log.firstTime_us - request.lateBy_us });
    }
    // Array sort is stable: logs with the same first time stay in the order of the request.
    inputs.sort((a, b) => compare(a.notBefore_us, b.notBefore_us));
    yield* mergeLogs(inputs, request.channels.length);
    for (const { rows } of inputs) this.diagnostics.push(...rows.diagnostics());
  }

  private async probeAll(): Promise<{ index: number; log: ProbedLog }[]> {
    const probed: { index: number; log: ProbedLog }[] = [];
    const unclear: { index: number; problem: LogProblem }[] = [];
    for (const index of this.request.files.keys()) {
      try {
        probed.push({ index, log: await this.probe(index, this.request) });
      } catch (error) {
        if (error instanceof LogProblem && error.diagnostic.code === DATE_ORDER_UNCLEAR)
          unclear.push({ index, problem: error });
        else await this.refuse(index, error);
      }
    }
    // A short log may hold no day after the 12th; the other logs of its logger then say how it writes dates.
    const forms = new Set(probed.map(({ log }) => log.form));
    const [form] = forms;
    for (const { index, problem } of unclear) {
      try {
        if (forms.size !== 1 || !(problem.forms ?? []).includes(form!)) throw problem;
        const log = await this.probe(index, { ...this.request, time: { ...this.request.time, form: form! } });
        const found = { ...log.found, time: `${form}, as in the other logs of the series` };
        probed.push({ index, log: { ...log, found } });
      } catch (error) {
        await this.refuse(index, error);
      }
    }
    return probed.sort((a, b) => a.index - b.index);
  }

  private probe(index: number, request: ReadRequest): Promise<ProbedLog> {
    return probeLog(request.files[index]!, request, this.source);
  }

  /** Notes why a log cannot be read; its digest is kept all the same, since it was an input. */
  private async refuse(index: number, error: unknown): Promise<void> {
    if (!(error instanceof LogProblem)) throw error;
    const { diagnostic } = error;
    const file = this.request.files[index]!;
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
}

function compare(a: number, b: number): number {
  return a < b ? -1 : a > b ? 1 : 0;
}
