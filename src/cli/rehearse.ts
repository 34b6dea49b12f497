/** `forebay rehearse`: checks a pipeline and designs every filter, without reading any data. */
import { type Diagnostic, DiagnosticError, renderDiagnostic } from "../diagnostics.ts";
import { loadPipeline } from "../pipeline/load.ts";
import { intervalProblems, planPipeline } from "../pipeline/plan.ts";
import { parseDuration } from "../pipeline/quantities.ts";
import { accountText, designAccount } from "../report/account.ts";
import type { StageAccount } from "../report/account-format.ts";
import { type Advice, adviseOnMeans, type Candidate } from "../report/adviser.ts";
import { STAGES } from "../stages/registry.ts";
import { checkClock } from "./check-clock.ts";
import { checkRemoved, type Streams } from "./clean.ts";
import { DONE, NOT_MET, WRONG } from "./exit-codes.ts";
import { responsePicture } from "./response-picture.ts";
import { shownPath } from "./shown-path.ts";
import { figure, frequencyText, table, timeText, wrap } from "./text.ts";

export interface RehearseOptions {
  readonly interval?: string;
  readonly json?: boolean;
}

export function rehearse(path: string, options: RehearseOptions, streams: Streams): number {
  try {
    const loaded = loadPipeline(path, shownPath(path), STAGES);
    const { plan, warnings } = planPipeline(loaded, STAGES);
    checkRemoved(loaded, plan);
    checkClock(loaded);
    for (const d of warnings) streams.err(`${renderDiagnostic(d)}\n`);
    if (options.interval !== undefined) {
      const problems = intervalProblems(loaded, plan, intervalOf(options.interval));
      if (problems.length > 0) throw new DiagnosticError(problems);
    }
    const design = designAccount(plan, loaded.pipeline);
    streams.out(
      options.json === true
        ? accountText(design)
        : `${designText(loaded.pipeline.name, loaded.pipeline.about, design, adviseOnMeans(plan))}\n`,
    );
    return design.requirements.every((r) => r.met) ? DONE : NOT_MET;
  } catch (error) {
    if (!(error instanceof DiagnosticError)) throw error;
    for (const d of error.diagnostics) streams.err(`${renderDiagnostic(d)}\n`);
    return WRONG;
  }
}

function intervalOf(text: string): number {
  const parsed = parseDuration(text);
  if (!("error" in parsed)) return parsed.seconds;
  const d: Diagnostic = {
    code: "bad-interval",
    severity: "error",
    file: "--interval",
    line: 0,
    column: 0,
    problem: "this is not a length of time",
    ...parsed.error,
  };
  throw new DiagnosticError([d]);
}

type Design = ReturnType<typeof designAccount>;

function designText(
  name: string,
  about: string | undefined,
  design: Design,
  advice: readonly Advice[],
): string {
  const lines = [about === undefined ? name : wrap(`${name}: ${about}`, 80), ""];
  lines.push(
    table([
      ["stage", "in", "out", "taps", "delay", "left", "ahead", "ends", "rise"],
      ...design.stages.map((s) => [
        `${s.place} ${s.stage}`,
        s.in.interval_s === null ? "rows" : timeText(s.in.interval_s, 3),
        s.out.interval_s === null ? "rows" : timeText(s.out.interval_s, 3),
        s.taps === null ? "–" : String(s.taps),
        timeText(s.delay.introduced_s, 3),
        timeText(s.delay.residual_s, 3),
        s.look_ahead_s === null ? "record" : timeText(s.look_ahead_s, 3),
        timeText(s.end_s, 3),
        s.rise_s === null ? "–" : timeText(s.rise_s, 3),
      ]),
    ]),
  );
  const { chain } = design;
  lines.push(
    "",
    wrap(
      `The clean series has a sample every ${timeText(chain.out_interval_s)} and is ${
        chain.delay_s === 0 ? "not late" : `late by ${timeText(chain.delay_s)}`
      }; the value at t uses data up to t + ${chain.look_ahead_s === null ? "the whole record" : timeText(chain.look_ahead_s)}.${
        chain.rise_s === null ? "" : ` A sudden step rises from 10 to 90 % in ${timeText(chain.rise_s)}.`
      }`,
      80,
    ),
  );
  for (const s of design.stages) {
    lines.push("", ...stageText(s));
    for (const a of advice) if (a.place === s.place) lines.push(...adviceText(a));
  }
  if (design.requirements.length > 0) {
    lines.push("", "requirements");
    for (const r of design.requirements)
      lines.push(
        wrap(
          `  ${r.met ? "met     " : "NOT MET "} ${r.requirement}${r.channel === null ? "" : ` (${r.channel})`}: ${r.predicted}${
            r.margin === null ? "" : `, margin ${r.margin}`
          }`,
          80,
          " ".repeat(11),
        ),
      );
  }
  return lines.join("\n");
}

function stageText(s: StageAccount): string[] {
  const lines = [wrap(`${s.place} ${s.stage}: ${s.says}`, 80, "  ")];
  if (s.gain !== null) {
    const at = (f: number | number[] | null) =>
      f === null ? "–" : Array.isArray(f) ? f.map((x) => frequencyText(x)).join(" and ") : frequencyText(f);
    lines.push(`  gain at 0 Hz ${figure(s.gain.dc, 6)}`);
    lines.push(
      `  -1 dB at ${at(s.gain.f_1dB_Hz)}`,
      `  -3 dB at ${at(s.gain.f_3dB_Hz)}`,
      `  -6 dB at ${at(s.gain.f_6dB_Hz)}`,
    );
    lines.push(
      `  noise bandwidth ${frequencyText(s.enbw_Hz, false)}, overshoot ${figure(s.overshoot_pct, 3)} %`,
    );
  }
  lines.push(...responsePicture(s));
  if (s.alias !== null)
    lines.push(
      wrap(
        `  aliases: at worst ${frequencyText(s.alias.design_source_Hz, false)} folds into 0 to ${frequencyText(
          s.alias.kept_to_Hz,
        )} at ${figure(s.alias.design_worst_gain_dB)} dB (limit ${s.alias.limit_dB} dB)${s.alias.design_met ? "" : ", ACCEPTED in the pipeline"}`,
        80,
        "    ",
      ),
    );
  for (const f of s.folds)
    lines.push(
      `  ${figure(f.frequency_Hz)} Hz would land at ${frequencyText(f.lands_at_Hz)}, ${figure(f.gain_dB)} dB`,
    );
  return lines;
}

function adviceText({ remarks, mean, sameNoise, sameDelay }: Advice): string[] {
  const row = (what: string, c: Candidate) => [
    what,
    String(c.taps),
    timeText(c.delay_s, 3),
    frequencyText(c.noiseBandwidth_Hz, false),
    frequencyText(c.f3_Hz, false),
    figure(c.sideLobe_dB, 3),
    figure(c.overshoot_pct, 2),
  ];
  const side = table([
    ["", "taps", "delay", "noise bw", "-3 dB at", "side lobe, dB", "overshoot, %"],
    row("this mean", mean),
    row("same noise", sameNoise),
    row("same delay", sameDelay),
  ]);
  return [
    "  what a mean does badly:",
    ...remarks.map((r) => wrap(`  - ${r}`, 80, "    ")),
    "  designed filters beside it:",
    ...side.split("\n").map((line) => `    ${line}`),
    wrap(`  same noise bandwidth: ${sameNoise.write}`, 80, "    "),
    wrap(`  same delay: ${sameDelay.write}`, 80, "    "),
  ];
}
