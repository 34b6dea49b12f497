/** What the account says of a stage that works on rows, before the grid. */
import type { ChannelResult } from "../engine/run-chain.ts";
import { isoTime } from "../outputs/cell-text.ts";
import type { Plan, PlannedRowStage } from "../pipeline/plan-types.ts";
import type { RowFinding } from "../stages/stage.ts";
import type { ChannelAccount, StageAccount } from "./account-format.ts";
import { counted, unmeasured } from "./channel-account.ts";

/** The part that is known before any data: a row stage has no rate, so no response and no delay. */
export function rowStageDesignAccount({ place, stage, design }: PlannedRowStage): StageAccount {
  return {
    place,
    stage,
    says: design.says,
    settings: design.settings,
    in: { interval_s: null, samples: 0 },
    out: { interval_s: null, samples: 0 },
    taps: null,
    coefficients: null,
    delay: { samples: 0, introduced_s: 0, compensated_s: 0, residual_s: 0 },
    look_ahead_s: design.reach_s.after,
    end_s: 0,
    rise_s: null,
    overshoot_pct: null,
    gain: null,
    enbw_Hz: null,
    response: null,
    step: null,
    folds: [],
    channels: {},
    alias: null,
    notes: { ...design.notes },
  };
}

/** The same with what was found: every count is of rows. */
export function rowStageAccount(
  plan: Plan,
  planned: PlannedRowStage,
  index: number,
  results: readonly ChannelResult[],
  rows: number,
): StageAccount {
  const account = rowStageDesignAccount(planned);
  const channels: Record<string, ChannelAccount> = {};
  const found: Record<string, unknown> = {};
  for (const [c, { name }] of plan.channels.entries()) {
    const measure = results[c]!.rowMeasures[index]!;
    channels[name] = { ...unmeasured(planned.design.channels[c]!.unit), ...counted(measure.counts) };
    const { rejected, suspect, firstRejected, firstSuspect, notes } = measure.effect;
    if (!measure.active && Object.keys(suspect).length === 0) continue;
    found[name] = {
      ...notes,
      unit: planned.signalIn.channels[c]!.unit,
      rejected,
      suspect,
      first_rejected: firstRejected.map(listed),
      first_suspect: firstSuspect.map(listed),
    };
  }
  return {
    ...account,
    in: { ...account.in, samples: rows },
    out: { ...account.out, samples: results[0]!.rowMeasures[index]!.counts.samples },
    channels,
    notes: { ...account.notes, rows: found },
  };
}

const listed = ({ time_us, value, reason }: RowFinding) => ({ time: isoTime(time_us), value, reason });
