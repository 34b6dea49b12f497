/** Assembles the account of one series (or one day of it). */
import type { ChannelResult } from "../engine/run-chain.ts";
import type { Scope } from "../engine/scope.ts";
import type { Timing } from "../engine/timing.ts";
import type { FileAccount } from "../logs/rows.ts";
import { isoTime } from "../outputs/cell-text.ts";
import type { Plan } from "../pipeline/plan-types.ts";
import type { Pipeline } from "../pipeline/schema.ts";
import { convolveTaps } from "../signal/convolve.ts";
import { intervalSeconds } from "../signal/grid.ts";
import { stepResponse } from "../signal/response.ts";
import type {
  Account,
  ChainAccount,
  InputAccount,
  OutputAccount,
  RequirementAccount,
  StageAccount,
  TimingAccount,
} from "./account-format.ts";
import { CAUTIONS } from "./cautions.ts";
import { counted, wholeAccount } from "./channel-account.ts";
import { chainDelay, judgeRequirements } from "./requirements.ts";
import { rowStageAccount, rowStageDesignAccount } from "./row-stage-account.ts";
import { gridStageAccount, lookAhead, stageAccount, stageDesignAccount } from "./stage-account.ts";
import { stripAccount } from "./strip-account.ts";
import { verdictOf } from "./verdict.ts";

export const ACCOUNT_FORMAT = "forebay-account/1";
/** Drift is stated against the interval declared by the grid when the log's own is within this share of it. */
const NEAR = 0.01;
/** Longest combined impulse response for which the chain's own rise time is worked out. */
const LONGEST_COMBINED = 2 ** 18;

export interface AccountParts {
  readonly version: string;
  readonly pipeline: Pipeline;
  readonly pipelineText: string;
  readonly pipelineSha256: string;
  readonly logger: string | null;
  readonly plan: Plan;
  readonly inputs: readonly FileAccount[];
  readonly timing: Timing;
  readonly results: readonly ChannelResult[];
  readonly scope: Scope;
  readonly rows: number;
  readonly first_us: number | null;
  readonly last_us: number | null;
  readonly outputs: readonly OutputAccount[];
}

export function makeAccount(parts: AccountParts): Account {
  const { plan, results, timing, pipeline } = parts;
  const stages = [
    ...plan.rowStages.map((planned, i) => rowStageAccount(plan, planned, i, results, parts.rows)),
    gridStageAccount(plan, results, parts.rows, timing.nominal_us / 1e6),
    ...plan.stages.map((planned, i) => stageAccount(plan, planned, i, results)),
  ].sort((a, b) => a.place - b.place);
  const requirements = judgeRequirements(plan, pipeline.requirements, results);
  const chain = chainAccount(parts);
  return {
    format: ACCOUNT_FORMAT,
    software: { name: "forebay", version: parts.version },
    pipeline: {
      name: pipeline.name,
      about: pipeline.about ?? null,
      sha256: parts.pipelineSha256,
      text: parts.pipelineText,
    },
    logger: parts.logger,
    channels: plan.channels.map(({ name, unit, column }) => ({ name, unit, column })),
    scope: { from: scopeText(parts.scope.from_us), until: scopeText(parts.scope.until_us) },
    inputs: parts.inputs.map((file) =>
      inputAccount(
        file,
        pipeline.channels.map((c) => c.name),
      ),
    ),
    timing: timingAccount(timing, intervalSeconds(plan.gridStage.design.grid)),
    stages,
    chain,
    requirements,
    verdict: verdictOf(stages, chain, requirements),
    cautions: [...CAUTIONS],
    outputs: [...parts.outputs],
  };
}

const scopeText = (us: number): string | null => (Number.isFinite(us) ? isoTime(us) : null);

/** What the design knows: the same keys, without data. */
export function designAccount(
  plan: Plan,
  pipeline: Pipeline,
): {
  stages: StageAccount[];
  chain: Omit<ChainAccount, "channels" | "first" | "last">;
  requirements: RequirementAccount[];
} {
  const stages = [
    ...plan.rowStages.map(rowStageDesignAccount),
    ...[plan.gridStage, ...plan.stages].map((s) => stageDesignAccount(plan, s)),
  ].sort((a, b) => a.place - b.place);
  return {
    stages,
    chain: chainDesign(plan),
    requirements: judgeRequirements(plan, pipeline.requirements, null),
  };
}

function inputAccount(file: FileAccount, channels: readonly string[]): InputAccount {
  const { rows } = file;
  const aside = [...rows.setAside.entries()].sort(([a], [b]) => (a < b ? -1 : 1));
  return {
    file: file.file,
    bytes: file.bytes,
    sha256: file.sha256,
    rows: {
      read: rows.read,
      used: rows.used,
      merged: rows.merged,
      set_aside: Object.fromEntries(aside.map(([reason, s]) => [reason, s.count])),
      set_aside_lines: Object.fromEntries(aside.map(([reason, s]) => [reason, [...s.firstLines]])),
      reordered: rows.reordered.count,
      reordered_lines: [...rows.reordered.firstLines],
    },
    missing_cells: Object.fromEntries(channels.map((name, c) => [name, rows.missingCells[c] ?? 0])),
    unreadable_cells: Object.fromEntries(
      channels.map((name, c) => [
        name,
        {
          count: rows.unreadableCells[c]?.count ?? 0,
          lines: [...(rows.unreadableCells[c]?.firstLines ?? [])],
        },
      ]),
    ),
    found: file.found,
  };
}

function timingAccount(t: Timing, declared_s: number): TimingAccount {
  const fitted_s = t.fitted_us === null ? null : t.fitted_us / 1e6;
  const near = Math.abs(t.nominal_us / 1e6 / declared_s - 1) <= NEAR;
  return {
    first: isoTime(t.first_us),
    last: isoTime(t.last_us),
    rows: t.rows,
    nominal_interval_s: t.nominal_us / 1e6,
    fitted_interval_s: fitted_s,
    drift_ppm: fitted_s !== null && near ? (fitted_s / declared_s - 1) * 1e6 : null,
    jitter_sd_s: t.jitterSd_us === null ? null : t.jitterSd_us / 1e6,
    gap_count: t.gapCount,
    gap_total_s: t.gapTotal_us / 1e6,
    gaps: t.gaps.map((g) => ({
      from: isoTime(g.from_us),
      to: isoTime(g.to_us),
      length_s: (g.to_us - g.from_us) / 1e6,
    })),
  };
}

/** Figures of the whole chain; where stages work on some channels only, those of the channel with most. */
function chainDesign(plan: Plan): Omit<ChainAccount, "channels" | "first" | "last"> {
  const all = [plan.gridStage, ...plan.stages];
  const most = (figure: (s: (typeof all)[number], step: number) => number) =>
    Math.max(
      ...plan.channels.map((_, c) =>
        all
          .filter((s) => s.selected.includes(c))
          .reduce((sum, s) => sum + figure(s, intervalSeconds(s.signalIn.grid ?? s.design.grid)), 0),
      ),
    );
  return {
    in_interval_s: intervalSeconds(plan.gridStage.design.grid),
    out_interval_s: intervalSeconds(plan.outGrid),
    delay_s: chainDelay(plan),
    introduced_s: most((s, step) => s.design.delay.samples * step),
    compensated_s: most((s) => s.design.delay.compensated_s),
    look_ahead_s: all.some((s) => s.design.reach === null) ? null : rowsAhead(plan) + most(lookAhead),
    end_s: most((s) => s.design.end_s),
    rise_s: chainRise(plan),
  };
}

/** How far ahead of a row its marks can depend on others, all row stages together, seconds. */
const rowsAhead = (plan: Plan): number => plan.rowStages.reduce((sum, s) => sum + s.design.reach_s.after, 0);

function chainAccount(parts: AccountParts): ChainAccount {
  const { plan, results } = parts;
  return {
    ...chainDesign(plan),
    first: parts.first_us === null ? null : isoTime(parts.first_us),
    last: parts.last_us === null ? null : isoTime(parts.last_us),
    channels: Object.fromEntries(
      plan.channels.map((channel, c) => {
        const result = results[c]!;
        const accounted = result.measures.filter((m) => m.comparison !== null);
        const rms = (x: number | undefined) => (x === undefined ? null : Math.sqrt(x));
        const last = result.measures.at(-1)?.counts ?? result.gridCounts;
        return [
          channel.name,
          {
            unit: channel.unit,
            rms_in: rms(accounted[0]?.comparison?.sums.figures()?.varianceIn),
            rms_out: rms(accounted.at(-1)?.comparison?.sums.figures()?.varianceOut),
            counts: counted(last).counts,
            removal: wholeAccount(plan, c, result),
            strip: stripAccount(
              result.inputStrip,
              plan.gridStage.design.grid,
              result.cleanStrip,
              plan.outGrid,
            ),
          },
        ];
      }),
    ),
  };
}

/** The longest rise time over the channels; null when it is not known for one that passes a filter. */
function chainRise(plan: Plan): number | null {
  const filtered = plan.channels
    .map((_, c) => c)
    .filter((c) => plan.stages.some((s) => s.design.taps !== null && s.selected.includes(c)));
  const ways = new Map(filtered.map((c) => [plan.stages.map((s) => s.selected.includes(c)).join(), c]));
  const rises = [...ways.values()].map((c) => channelRise(plan, c));
  return rises.length === 0 || rises.includes(null) ? null : Math.max(...(rises as number[]));
}

/** Rise time of all filters together, on the first grid; null when a constant does not pass or the whole is too long. */
function channelRise(plan: Plan, channel: number): number | null {
  const interval = intervalSeconds(plan.gridStage.design.grid);
  let taps: Float64Array = Float64Array.of(1);
  let factor = 1;
  for (const { design, selected } of plan.stages) {
    if (design.taps !== null && selected.includes(channel)) {
      const spread = new Float64Array((design.taps.length - 1) * factor + 1);
      design.taps.forEach((w, i) => {
        spread[i * factor] = w;
      });
      if (spread.length * taps.length > 1e8 || spread.length + taps.length > LONGEST_COMBINED) return null;
      taps = convolveTaps(taps, spread);
    }
    factor *= design.keepEvery;
  }
  if (taps.length < 2) return null;
  const { rise_10_90 } = stepResponse(taps);
  return rise_10_90 === null ? null : rise_10_90 * interval;
}

/** The account as it is written: stable order, two blanks of indent, long lists of numbers on one line. */
export function accountText(account: unknown): string {
  return `${inlineNumbers(JSON.stringify(account, null, 2))}\n`;
}

/**
 * Arrays that hold only numbers and nulls are easier to read, and much shorter, on one line. Line breaks stand
 * only between values: inside a text they are escaped, so that a pipeline's text stays as it is.
 */
export function inlineNumbers(json: string): string {
  return json.replace(
    /\[\n *((?:-?[\d.eE+-]+|null)(?:,\n *(?:-?[\d.eE+-]+|null))*)\n *\]/g,
    (_, list: string) => `[${list.replace(/\s+/g, " ")}]`,
  );
}
