/**
 * Carries the signal's rate and channels through the chain and designs every stage, before any data.
 * All problems of all stages are gathered; a stage whose input is not known is left out of the search.
 */
import { type Diagnostic, DiagnosticError } from "../diagnostics.ts";
import { intervalSeconds } from "../signal/grid.ts";
import type {
  AnyDesign,
  AnyStage,
  GridDesign,
  Problem,
  ReportDesign,
  RowStageDesign,
  Signal,
  StageDesign,
} from "../stages/stage.ts";
import type { LoadedPipeline } from "./load.ts";
import { conversionProblem, orderProblem } from "./plan-order.ts";
import type { Plan, PlannedRowStage, PlannedStage } from "./plan-types.ts";

export interface Planned {
  readonly plan: Plan;
  readonly warnings: readonly Diagnostic[];
}

const isGridDesign = (design: StageDesign): design is GridDesign => "rowKernel" in design;
const isRowStageDesign = (design: AnyDesign): design is RowStageDesign => "rowStage" in design;
const isReportDesign = (design: StageDesign): design is ReportDesign => "report" in design;

/** Stages after which the rate is another. */
const CHANGES_GRID = new Set(["resample", "decimate"]);

/** Makes a problem of stage number `index` a diagnostic at its place in the pipeline file. */
export function asDiagnostic(loaded: LoadedPipeline, index: number, p: Problem): Diagnostic {
  const { line, column } = loaded.at(["chain", index, ...p.path]);
  return {
    code: p.code,
    severity: p.severity,
    file: loaded.shownName,
    line,
    column,
    problem: `${loaded.pipeline.chain[index]!.stage}: ${p.problem}`,
    ...(p.given === undefined ? {} : { given: p.given }),
    ...(p.allowed === undefined ? {} : { allowed: p.allowed }),
    ...(p.todo === undefined ? {} : { todo: p.todo }),
  };
}

/** Problems that only the interval of the log's own rows shows. */
export function intervalProblems(loaded: LoadedPipeline, plan: Plan, nominal_s: number): Diagnostic[] {
  return [...plan.rowStages, plan.gridStage].flatMap(({ design, place }) =>
    (design.checkInterval?.(nominal_s) ?? []).map((p) => asDiagnostic(loaded, place - 1, p)),
  );
}

/** @throws DiagnosticError with all problems of severity error */
export function planPipeline(loaded: LoadedPipeline, stages: ReadonlyMap<string, AnyStage>): Planned {
  const { pipeline } = loaded;
  const diagnostics: Diagnostic[] = [];
  const planned: PlannedStage[] = [];
  const rowStages: PlannedRowStage[] = [];
  const above: string[] = [];
  const everywhere = pipeline.channels.map((_, c) => c);
  let report: ReportDesign["report"] | null = null;
  let reportAt = -1;
  let failed = false;
  let signal: Signal | null = {
    grid: null,
    channels: pipeline.channels.map(({ name, unit }) => ({ name, unit })),
    filters: pipeline.channels.map(() => []),
    finest_s: null,
  };

  for (const entry of pipeline.chain) {
    const { index } = entry;
    const stage = stages.get(entry.stage)!;
    const say = (p: Problem) => diagnostics.push(asDiagnostic(loaded, index, p));
    if (signal === null) continue;
    const selected =
      entry.channels === undefined
        ? everywhere
        : everywhere.filter((c) => entry.channels!.includes(pipeline.channels[c]!.name));
    const order = orderProblem(stage, signal, above) ?? (failed ? null : conversionProblem(stage, signal));
    above.push(stage.name);
    if (order !== null) {
      say(order);
      failed = true;
      continue;
    }
    const outcome = stage.design(entry.settings as never, signal, selected);
    for (const p of outcome.problems) {
      // What folds cannot be judged while a filter above is not known.
      if (!(failed && p.code === "aliases-on-design")) say(p);
    }
    const { design } = outcome;
    if (design === null) {
      failed = true;
      // The search for mistakes goes on as long as the rate is known.
      if (CHANGES_GRID.has(stage.name)) signal = null;
      continue;
    }
    if (isRowStageDesign(design)) {
      rowStages.push({ place: index + 1, stage: stage.name, signalIn: signal, design, selected });
      signal = { ...signal, channels: design.channels };
      continue;
    }
    planned.push({
      place: index + 1,
      stage: stage.name,
      signalIn: signal,
      design,
      selected,
      accounted: false,
    });
    if (isReportDesign(design)) {
      report = design.report;
      reportAt = planned.length - 1;
    }
    signal = after(signal, design, selected);
  }
  const gridStage = planned.find((p) => isGridDesign(p.design));
  if (gridStage === undefined && !diagnostics.some((d) => d.severity === "error"))
    diagnostics.push({
      code: "no-grid",
      severity: "error",
      file: loaded.shownName,
      ...loaded.at(["chain"]),
      problem: "the chain never puts the rows onto an even grid",
      given: pipeline.chain.map((s) => s.stage).join(", ") || "an empty chain",
      allowed: "a chain with one resample stage",
      todo: "add a resample stage, for instance { stage: resample, interval: 1 s }",
    });
  if (diagnostics.some((d) => d.severity === "error")) throw new DiagnosticError(diagnostics);
  const marked = planned.map((p, i) => ({ ...p, accounted: i < reportAt && !isGridDesign(p.design) }));
  const grid = marked.find((p) => isGridDesign(p.design)) as Plan["gridStage"];
  return {
    plan: {
      channels: pipeline.channels.map((channel, c) => ({
        ...channel,
        unit: grid.signalIn.channels[c]!.unit,
      })),
      rowStages,
      gridStage: grid,
      stages: marked.filter((p) => p !== grid),
      report,
      outGrid: marked.at(-1)!.design.grid,
    },
    warnings: diagnostics,
  };
}

function after(signal: Signal, design: StageDesign, selected: readonly number[]): Signal {
  const interval_s = signal.grid === null ? 0 : intervalSeconds(signal.grid);
  return {
    ...signal,
    grid: design.grid,
    finest_s: signal.finest_s ?? intervalSeconds(design.grid),
    filters: signal.filters.map((list, c) =>
      design.taps !== null && selected.includes(c) ? [...list, { taps: design.taps, interval_s }] : list,
    ),
  };
}
