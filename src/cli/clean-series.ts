/** Cleans one series: reads its logs, runs the chain, publishes the clean series with its account. */
import { basename } from "node:path";
import { type Diagnostic, DiagnosticError } from "../diagnostics.ts";
import { brokenAliasLimits, runChain } from "../engine/run-chain.ts";
import type { Scope } from "../engine/scope.ts";
import { measureTiming, type Timing } from "../engine/timing.ts";
import { readLogs } from "../logs/read-logs.ts";
import { RowSpool } from "../logs/row-spool.ts";
import type { FileAccount, LogFile } from "../logs/rows.ts";
import { isoTime } from "../outputs/cell-text.ts";
import { PublishSet } from "../outputs/publish.ts";
import { SeriesCsv } from "../outputs/series-csv.ts";
import type { LoadedPipeline } from "../pipeline/load.ts";
import { intervalProblems } from "../pipeline/plan.ts";
import type { Plan } from "../pipeline/plan-types.ts";
import { readRequest } from "../pipeline/read-request.ts";
import { accountText, makeAccount } from "../report/account.ts";
import type { Account, OutputAccount } from "../report/account-format.ts";
import { renderReportPage } from "../report/page.ts";
import { intervalSeconds } from "../signal/grid.ts";

export interface SeriesTask {
  readonly loaded: LoadedPipeline;
  readonly plan: Plan;
  readonly logger: string | null;
  readonly files: readonly LogFile[];
  /** Folder of the outputs, and the files' common name. */
  readonly folder: string;
  readonly name: string;
  readonly scope: Scope;
  readonly version: string;
  /** Rows in a block; results do not depend on it. */
  readonly blockRows?: number;
  /** share of the step done, 0 to 1 (0 while it is not known), and rows read so far. */
  readonly onProgress?: (step: "reading" | "cleaning", share: number, rows: number) => void;
}

export interface SeriesOutcome {
  readonly account: Account;
  readonly diagnostics: readonly Diagnostic[];
}

/** More blank grid samples than this many a row mean that a time is wrong, not that a logger rested. */
const BLANK_PER_ROW = 1000;
const BLANK_ALLOWED = 5_000_000;

/** @throws DiagnosticError when the series cannot be cleaned; nothing is published then */
export async function cleanSeries(task: SeriesTask): Promise<SeriesOutcome> {
  const { loaded, plan } = task;
  const spool = new RowSpool(plan.channels.length, task.blockRows);
  try {
    const reading = readLogs(readRequest(loaded.pipeline, task.files));
    for await (const block of reading.blocks) {
      spool.append(block);
      task.onProgress?.("reading", 0, spool.rows);
    }
    const read = reading.diagnostics();
    const failed = read.filter((d) => d.severity === "error");
    const timing = measureTiming(() => spool.blocks());
    if (timing === null)
      throw new DiagnosticError(failed.length > 0 ? failed : [tooFewRows(task, spool.rows)]);
    const checked = checkAgainstLog(task, timing);
    if (checked.some((d) => d.severity === "error")) throw new DiagnosticError([...checked, ...failed]);
    const account = publish(task, spool, timing, reading.accounts());
    return { account, diagnostics: [...read, ...checked] };
  } finally {
    spool.close();
  }
}

function tooFewRows(task: SeriesTask, rows: number): Diagnostic {
  return {
    code: "too-few-rows",
    severity: "error",
    file: task.files[0]?.name ?? task.name,
    line: 0,
    column: 0,
    problem: "there are too few usable rows to clean",
    given: `${rows} usable ${rows === 1 ? "row" : "rows"}`,
    allowed: "at least 2 rows with times and values",
    todo: "check the time column and its form in the pipeline, or leave the file out",
  };
}

/** What the design could not know: how the grid sits with the log's own times. */
function checkAgainstLog(task: SeriesTask, timing: Timing): Diagnostic[] {
  const { loaded, plan } = task;
  const { design } = plan.gridStage;
  const diagnostics = intervalProblems(loaded, plan, timing.nominal_us / 1e6);
  const interval_us = intervalSeconds(design.grid) * 1e6;
  const { scope } = task;
  if (scope.from_us > timing.last_us || scope.until_us <= timing.first_us)
    diagnostics.push({
      code: "nothing-in-scope",
      severity: "error",
      file: task.files[0]!.name,
      line: 0,
      column: 0,
      problem: "no row lies in the time asked for with --from and --until",
      given: `rows from ${isoTime(timing.first_us)} to ${isoTime(timing.last_us)}`,
      allowed: "a time in which the log has rows",
      todo: "correct --from or --until, or name other logs with --logs",
    });
  const blank = timing.gapTotal_us / interval_us;
  if (blank > BLANK_ALLOWED && blank > BLANK_PER_ROW * timing.rows) {
    const longest = timing.gaps.reduce((a, b) => (b.to_us - b.from_us > a.to_us - a.from_us ? b : a));
    diagnostics.push({
      code: "grid-explodes",
      severity: "error",
      file: task.files[0]!.name,
      line: 0,
      column: 0,
      problem: "the rows are so far apart that the grid would be nearly all blank: a time is likely wrong",
      given: `${timing.rows} rows, a gap of ${Math.round((longest.to_us - longest.from_us) / 86_400e6)} days, ${Math.round(blank)} blank samples`,
      allowed: `at most ${BLANK_PER_ROW} blank samples a row`,
      todo: "find the wrong time, or clean the stretches one by one with --from and --until",
    });
  }
  return diagnostics;
}

function publish(task: SeriesTask, spool: RowSpool, timing: Timing, inputs: readonly FileAccount[]): Account {
  const { loaded, plan, name } = task;
  const { writes, channels } = loaded.pipeline;
  const set = new PublishSet(task.folder);
  try {
    const names = channels.map((c) => c.name);
    const once = (suspect: ReadonlySet<number>) => {
      const cleanFile = set.create(`${name}.clean.csv`);
      const options = { channels: names, digits: writes.digits, flags: writes.flags };
      const clean = new SeriesCsv(cleanFile, { ...options, grid: plan.outGrid });
      const removedFile = writes.removed ? set.create(`${name}.removed.csv`) : null;
      const removed =
        removedFile === null
          ? null
          : new SeriesCsv(removedFile, { ...options, grid: plan.gridStage.design.grid });
      const results = runChain({
        plan,
        rows: spool,
        scope: task.scope,
        suspect,
        onClean: (first, count, values, marks) => clean.write(first, count, values, marks),
        ...(removed === null
          ? {}
          : { onRemoved: (first, count, values, marks) => removed.write(first, count, values, marks) }),
        onProgress: (share) => task.onProgress?.("cleaning", share, spool.rows),
      });
      return { results, clean, cleanFile, removed, removedFile };
    };
    let made = once(new Set());
    const broken = brokenAliasLimits(plan, made.results);
    if (broken.size > 0) {
      // The limit is known to be broken only once all is read; the flags must say so from the first row on.
      set.abandon();
      made = once(broken);
    }
    const outputs: OutputAccount[] = [{ ...made.cleanFile.finish(), rows: made.clean.rows }];
    if (made.removed !== null && made.removedFile !== null)
      outputs.push({ ...made.removedFile.finish(), rows: made.removed.rows });
    const parts = {
      version: task.version,
      pipeline: loaded.pipeline,
      pipelineText: loaded.text,
      pipelineSha256: loaded.sha256,
      logger: task.logger,
      plan,
      inputs,
      timing,
      results: made.results,
      scope: task.scope,
      rows: spool.rows,
      first_us: made.clean.firstTime_us,
      last_us: made.clean.lastTime_us,
      outputs,
    };
    const draft = makeAccount(parts);
    if (writes.page) {
      const page = set.create(`${name}.report.html`);
      page.write(renderReportPage(draft));
      outputs.push({ ...page.finish(), rows: 0 });
    }
    const account = makeAccount({ ...parts, outputs });
    const file = set.create(`${name}.account.json`);
    file.write(accountText(account));
    file.finish();
    set.publish();
    return account;
  } catch (error) {
    set.abandon();
    throw error;
  }
}

/** Name shown for a series on a terminal. */
export const seriesTitle = (task: SeriesTask): string => task.logger ?? basename(task.name);
