/** What `clean` says of a series when it is done. */
import type { Account } from "../report/account-format.ts";
import { rowNotes } from "../report/page-rows.ts";
import { figure, frequencyText, grouped, timeText, wrap } from "./text.ts";

const LABEL = 10;

export function seriesSummary(account: Account, title: string, folder: string): string {
  const lines = [title];
  const say = (label: string, text: string) =>
    lines.push(wrap(`  ${label.padEnd(LABEL - 2)}${text}`, 80, " ".repeat(LABEL)));
  say("rows", rowsText(account));
  const { chain, timing } = account;
  const clean = account.outputs[0]!;
  if (timing !== null)
    say(
      "clock",
      `a row every ${timeText(timing.nominal_interval_s)}${
        timing.gap_count === 0
          ? ", no gap"
          : `, ${grouped(timing.gap_count)} ${timing.gap_count === 1 ? "gap" : "gaps"}, ${timeText(timing.gap_total_s)} in all`
      }${timing.drift_ppm === null ? "" : `, drift ${figure(Math.round(timing.drift_ppm * 100) / 100, 3)} ppm`}`,
    );
  say(
    "clean",
    `${grouped(clean.rows)} samples, one every ${timeText(chain.out_interval_s)}: ${chain.first ?? "–"} to ${chain.last ?? "–"}`,
  );
  for (const [name, channel] of Object.entries(chain.channels))
    say("", `${name}: ${statesText(channel.counts)}`);
  for (const stage of account.stages)
    for (const [name, n] of rowNotes(stage)) {
      const found = [
        ...Object.entries(n.rejected).map(
          ([reason, k]) => [k, `${grouped(k)} rejected (${reason})`] as const,
        ),
        ...Object.entries(n.suspect).map(([reason, k]) => [k, `${grouped(k)} suspect (${reason})`] as const),
      ].filter(([k]) => k > 0);
      const changed = n.rows_changed === undefined ? [] : [`${grouped(n.rows_changed)} rows changed`];
      const texts = [...changed, ...found.map(([, text]) => text)];
      say(
        "rows",
        `${stage.place} ${stage.stage}, ${name}: ${texts.length === 0 ? "nothing rejected" : texts.join(", ")}`,
      );
    }
  for (const stage of account.stages)
    for (const [name, c] of Object.entries(stage.channels)) {
      if (!c.accounted || stage.stage === "report") continue;
      // A line that is next to nothing beside the signal is in the account, not here.
      const tones = c.tones.filter(
        (t) => (t.gain_dB < -3 || t.folds) && t.amplitude > 1e-4 * (c.rms_in ?? 0),
      );
      say(
        "removed",
        `${stage.place} ${stage.stage}, ${name}: ${figure(c.variance_removed_pct)} % of the variance (rms ${figure(c.rms_removed)} ${c.unit})${
          tones.length === 0
            ? ""
            : `; tone at ${frequencyText(tones[0]!.frequency_Hz)} by ${figure(-tones[0]!.gain_dB, 3)} dB${
                tones[0]!.folds ? `, would land at ${frequencyText(tones[0]!.lands_at_Hz)}` : ""
              }`
        }`,
      );
    }
  say(
    "late",
    `${timeText(chain.delay_s)} (introduced ${timeText(chain.introduced_s)}, compensated ${timeText(
      chain.compensated_s,
    )}); ${
      chain.look_ahead_s === null
        ? "each value uses the whole record"
        : `the value at t uses data up to t + ${timeText(chain.look_ahead_s)}`
    }`,
  );
  say("verdict", account.verdict.met ? "all requirements and alias limits met" : "NOT MET");
  for (const remark of account.verdict.remarks) say("", remark);
  const page = account.outputs.find((o) => o.file.endsWith(".html"));
  say(page === undefined ? "folder" : "report", page === undefined ? folder : `${folder}/${page.file}`);
  return lines.join("\n");
}

function rowsText(account: Account): string {
  let read = 0;
  let used = 0;
  let merged = 0;
  let late = 0;
  const aside = new Map<string, number>();
  for (const { rows } of account.inputs) {
    read += rows.read;
    used += rows.used;
    merged += rows.merged;
    late += rows.reordered;
    for (const [reason, n] of Object.entries(rows.set_aside)) aside.set(reason, (aside.get(reason) ?? 0) + n);
  }
  const out = [...aside.values()].reduce((a, b) => a + b, 0);
  const files = account.inputs.length;
  return `${grouped(read)} read from ${files} ${files === 1 ? "file" : "files"} = ${grouped(used)} used + ${grouped(merged)} merged + ${grouped(out)} set aside${
    aside.size === 0 ? "" : ` (${[...aside].map(([reason, n]) => `${reason} ${grouped(n)}`).join(", ")})`
  }${late === 0 ? "" : `; ${grouped(late)} came late and were put in their place`}`;
}

function statesText(counts: Record<string, number>): string {
  return Object.entries(counts)
    .filter(([, n]) => n > 0)
    .map(([state, n]) => `${grouped(n)} ${state}`)
    .join(", ");
}
