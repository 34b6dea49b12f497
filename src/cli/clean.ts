/** `forebay clean`: cleans the logs of a pipeline, series by series. */
import { resolve } from "node:path";
import { type Diagnostic, DiagnosticError, quoted, renderDiagnostic } from "../diagnostics.ts";
import { removedLag } from "../engine/run-chain.ts";
import type { Scope } from "../engine/scope.ts";
import { findSeries, settledOnly } from "../logs/find-series.ts";
import { appendRun, type RunLine } from "../outputs/runs-ledger.ts";
import { type LoadedPipeline, loadPipeline } from "../pipeline/load.ts";
import { planPipeline } from "../pipeline/plan.ts";
import type { Plan } from "../pipeline/plan-types.ts";
import { parseInstant } from "../pipeline/quantities.ts";
import { STAGES } from "../stages/registry.ts";
import { checkClock } from "./check-clock.ts";
import { cleanSeries } from "./clean-series.ts";
import { DONE, NOT_MET, PART_DONE, WRONG } from "./exit-codes.ts";
import { openJournal } from "./journal.ts";
import { shownPath } from "./shown-path.ts";
import { seriesSummary } from "./summary.ts";
import { grouped, wrap } from "./text.ts";
import { VERSION } from "./version.ts";

export interface CleanOptions {
  readonly logs?: readonly string[];
  readonly folder?: string;
  readonly from?: string;
  readonly until?: string;
  readonly journal?: string;
  readonly quiet?: boolean;
}

export interface Streams {
  out(text: string): void;
  err(text: string): void;
  readonly terminal: boolean;
}

export async function clean(path: string, options: CleanOptions, streams: Streams): Promise<number> {
  const complain = (list: readonly Diagnostic[]) => {
    for (const d of list) streams.err(`${renderDiagnostic(d)}\n`);
  };
  let loaded: LoadedPipeline;
  let plan: Plan;
  let scope: Scope;
  try {
    loaded = loadPipeline(path, shownPath(path), STAGES);
    const planned = planPipeline(loaded, STAGES);
    plan = planned.plan;
    complain(planned.warnings);
    checkRemoved(loaded, plan);
    checkClock(loaded);
    scope = scopeOf(options);
  } catch (error) {
    if (!(error instanceof DiagnosticError)) throw error;
    complain(error.diagnostics);
    return WRONG;
  }
  const { pipeline } = loaded;
  const patterns = options.logs ?? pipeline.logs.files;
  const base = options.logs === undefined ? loaded.folder : process.cwd();
  const series = findSeries(patterns, base, loaded.folder);
  if (series.length === 0) {
    complain([
      {
        code: "no-logs",
        severity: "error",
        file: loaded.shownName,
        ...(options.logs === undefined ? loaded.at(["logs", "files"]) : { line: 0, column: 0 }),
        problem: "no log file is there",
        given: patterns.map(quoted).join(", "),
        allowed: "paths or globs that name at least one file",
        todo:
          options.logs === undefined
            ? "correct logs.files; paths are relative to the pipeline file"
            : "correct --logs; paths are relative to the current folder",
      },
    ]);
    return WRONG;
  }
  const journal = openJournal({
    ...(options.journal === undefined ? {} : { file: options.journal }),
    quiet: options.quiet === true,
    terminal: streams.terminal,
  });

  let failed = 0;
  let wrongByDesign = 0;
  let unmet = 0;
  for (const { logger, files: found } of series) {
    const quiet_ms = (pipeline.logs.settled?.seconds ?? 0) * 1000;
    const { settled: files, unsettled } = settledOnly(found, quiet_ms, Date.now());
    const folder = resolve(
      options.folder ?? resolve(loaded.folder, pipeline.writes.folder.replaceAll("{logger}", logger ?? "")),
    );
    const shared =
      logger !== null && (options.folder !== undefined || !pipeline.writes.folder.includes("{logger}"));
    const name = shared ? `${pipeline.name}-${logger}` : pipeline.name;
    const title = logger === null ? pipeline.name : `${pipeline.name} ${logger}`;
    const fields = { pipeline: pipeline.name, series: logger };
    const started = new Date();
    if (unsettled.length > 0) {
      const names = unsettled.map((f) => f.name);
      journal.info({ ...fields, left: names }, "files still changing are left for the next run");
      if (options.quiet !== true)
        streams.out(
          `${title}: left for the next run, changed less than ${pipeline.logs.settled!.text} ago: ${names.join(", ")}\n`,
        );
      if (files.length === 0) continue;
    }
    journal.info({ ...fields, files: files.length }, "cleaning");
    try {
      const outcome = await cleanSeries({
        loaded,
        plan,
        logger,
        files,
        folder,
        name,
        scope,
        version: VERSION,
        onProgress: (step, share, rows) => journal.progress(title, `${step} ${grouped(rows)} rows`, share),
      });
      journal.settle();
      complain(outcome.diagnostics);
      if (outcome.diagnostics.some((d) => d.severity === "error")) failed++;
      const { account } = outcome;
      if (!account.verdict.met) unmet++;
      appendRun(folder, runLine(started, name, account));
      if (options.quiet !== true) streams.out(`${seriesSummary(account, title, shownPath(folder))}\n`);
      journal.info({ ...fields, rows: account.timing?.rows ?? 0, met: account.verdict.met }, "cleaned");
    } catch (error) {
      journal.settle();
      const list =
        error instanceof DiagnosticError ? error.diagnostics : systemDiagnostic(error, shownPath(folder));
      if (list === null) throw error;
      complain(list);
      failed++;
      if (list.every((d) => d.file === loaded.shownName)) wrongByDesign++;
      journal.error({ ...fields, problems: list.map((d) => d.code) }, "not cleaned");
      if (options.quiet !== true)
        streams.out(`${title}\n${wrap(`  verdict NOT CLEANED: ${list[0]!.problem}`, 80, " ".repeat(10))}\n`);
    }
  }
  if (wrongByDesign === series.length) return WRONG;
  if (failed > 0) return PART_DONE;
  return unmet > 0 ? NOT_MET : DONE;
}

/** The removed series needs one grid: half-sample delays have no place on it. */
export function checkRemoved(loaded: LoadedPipeline, plan: Plan): void {
  if (!loaded.pipeline.writes.removed) return;
  const bad = plan.channels.findIndex((_, c) => removedLag(plan, c) === null);
  if (bad < 0) return;
  const even = plan.stages.find(
    (s) => s.design.taps !== null && s.design.taps.length % 2 === 0 && s.selected.includes(bad),
  );
  throw new DiagnosticError([
    {
      code: "removed-between-samples",
      severity: "error",
      file: loaded.shownName,
      ...loaded.at(["writes", "removed"]),
      problem:
        "the clean series lies half-way between the samples of its input, so what was removed has no place on that grid",
      given:
        even === undefined
          ? "a delay that is not a whole number of samples"
          : `stage ${even.place} (${even.stage}) with ${even.design.taps!.length} points`,
      allowed: "windows of odd length",
      todo:
        even === undefined
          ? "set removed: false"
          : `use ${even.design.taps!.length + 1} points, or set removed: false`,
    },
  ]);
}

function scopeOf(options: CleanOptions): Scope {
  const problems: Diagnostic[] = [];
  const read = (key: "from" | "until", open: number) => {
    const text = options[key];
    if (text === undefined) return open;
    const parsed = parseInstant(text);
    if ("error" in parsed) {
      problems.push({
        code: "bad-time",
        severity: "error",
        file: `--${key}`,
        line: 0,
        column: 0,
        problem: "this is not a time",
        ...parsed.error,
      });
      return open;
    }
    return parsed.us;
  };
  const from_us = read("from", Number.NEGATIVE_INFINITY);
  const until_us = read("until", Number.POSITIVE_INFINITY);
  if (problems.length === 0 && !(from_us < until_us))
    problems.push({
      code: "empty-scope",
      severity: "error",
      file: "--until",
      line: 0,
      column: 0,
      problem: "the end is not after the start",
      given: `${options.from} until ${options.until}`,
      allowed: "a later time",
      todo: "swap them",
    });
  if (problems.length > 0) throw new DiagnosticError(problems);
  return { from_us, until_us };
}

/** Troubles of the machine that a person can mend, as diagnostics; null for anything else. */
function systemDiagnostic(error: unknown, folder: string): Diagnostic[] | null {
  const { code, syscall } = error as NodeJS.ErrnoException;
  const known: Record<string, string> = {
    EACCES: "permission denied",
    EPERM: "permission denied",
    EROFS: "the file system is read-only",
    ENOSPC: "the disk is full",
    EDQUOT: "the disk quota is used up",
    ENOTDIR: "a part of the path is not a folder",
    EEXIST: "a file stands where the folder should be",
    ENOENT: "the folder went away",
    EIO: "the disk reports an error",
    EISDIR: "a folder stands where a file should go",
    EMFILE: "too many files are open",
    ENAMETOOLONG: "a file name is too long",
  };
  if (code === undefined || syscall === undefined) return null;
  return [
    {
      code: "cannot-write",
      severity: "error",
      file: folder,
      line: 0,
      column: 0,
      problem: `the outputs could not be written: ${known[code] ?? syscall}`,
      given: code,
      allowed: "a folder that can be written to, with room",
      todo: "mend it and run again; what was there before is untouched",
    },
  ];
}

function runLine(
  started: Date,
  name: string,
  account: Awaited<ReturnType<typeof cleanSeries>>["account"],
): RunLine {
  return {
    started: started.toISOString(),
    ended: new Date().toISOString(),
    name,
    logger: account.logger,
    software: account.software.version,
    pipeline_sha256: account.pipeline.sha256,
    first: account.chain.first,
    last: account.chain.last,
    rows: account.timing?.rows ?? 0,
    met: account.verdict.met,
    outputs: account.outputs.map(({ file, sha256 }) => ({ file, sha256 })),
  };
}
