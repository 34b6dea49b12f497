/** The verdict that stands on top: what does not hold, in plain words. */
import type { Account, ChainAccount, RequirementAccount, StageAccount } from "./account-format.ts";

export function verdictOf(
  stages: readonly StageAccount[],
  chain: ChainAccount,
  requirements: readonly RequirementAccount[],
): Account["verdict"] {
  const remarks: string[] = [];
  let met = true;
  for (const r of requirements)
    if (!r.met) {
      met = false;
      remarks.push(
        `Requirement not met${r.channel === null ? "" : ` on ${r.channel}`}: ${r.requirement}; predicted ${r.predicted ?? "not known"}${
          r.measured === null ? "" : `, measured ${r.measured}`
        }.`,
      );
    }
  for (const { alias, place, stage } of stages) {
    if (alias === null) continue;
    if (!alias.met && alias.ratio_dB !== null) {
      met = false;
      remarks.push(
        `Alias limit not met on the data in stage ${place} (${stage}), channel ${alias.worst_channel}: ${hz(alias.source_Hz)} folds to ${hz(
          alias.lands_at_Hz,
        )} at ${alias.ratio_dB.toFixed(1)} dB of the power that belongs there; the limit is ${alias.limit_dB} dB. The series is marked suspect.`,
      );
    } else if (!alias.design_met)
      remarks.push(
        `Stage ${place} (${stage}) can fold ${hz(alias.design_source_Hz)} into the band kept at ${alias.design_worst_gain_dB.toFixed(
          1,
        )} dB; this was accepted in the pipeline.`,
      );
  }
  for (const [name, { counts }] of Object.entries(chain.channels)) {
    const { missing, screened, ...present } = counts;
    if (missing + screened > 0 && Object.values(present).every((n) => n === 0))
      remarks.push(
        `Channel ${name} has no value at all in the clean series: see its missing cells, the gaps, and the length of the windows.`,
      );
  }
  if (Math.abs(chain.delay_s) > 0)
    remarks.push(
      `The clean series is late by ${Number(chain.delay_s.toPrecision(6))} s: a change at t shows at t plus that.`,
    );
  return { met, remarks };
}

const hz = (f: number | null): string =>
  f === null ? "an unknown frequency" : `${Number(f.toPrecision(4))} Hz`;
