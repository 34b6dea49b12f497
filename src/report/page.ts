/** The report: one self-contained page, a function of the account alone. No script, nothing fetched. */
import { createHash } from "node:crypto";
import type { Account, ChannelAccount } from "./account-format.ts";
import { anchor, escaped, htmlTable } from "./html.ts";
import { channelSection, stageSection } from "./page-stage.ts";
import { STYLE } from "./page-style.ts";
import { stripPlot } from "./plots/strip.ts";
import { count, dB, duration, number, percent, timeForPeople, withPeriod, withUnit } from "./text.ts";

export function renderReportPage(account: Account): string {
  const title = `${account.pipeline.name}${account.logger === null ? "" : ` · ${account.logger}`}`;
  const hash = createHash("sha256").update(STYLE, "utf8").digest("base64");
  const sections: [string, string, string][] = [
    ["inputs", "What went in", inputs(account)],
    ["outputs", "What came out", outputs(account)],
    ["removed", "What was removed", removed(account)],
    ["delay", "How late it is", delay(account)],
    ...(account.requirements.length > 0
      ? ([["requirements", "What was asked of it", requirements(account)]] as [string, string, string][])
      : []),
    [
      "cautions",
      "What to be careful about",
      `<ul>${account.cautions.map((c) => `<li>${escaped(c)}</li>`).join("")}</ul>`,
    ],
    ...account.stages.map((s): [string, string, string] => [
      anchor("stage", s.place),
      `Stage ${s.place}: ${s.stage}`,
      stageSection(s),
    ]),
    ["record", "For the record", record(account)],
  ];
  const contents = sections.map(([id, name]) => `<li><a href="#${id}">${escaped(name)}</a></li>`).join("");
  const body = sections
    .map(
      ([id, name, html]) =>
        `<section id="${id}" aria-labelledby="${id}-h"><h2 id="${id}-h">${escaped(name)}</h2>${html}</section>`,
    )
    .join("\n");
  return `<!doctype html>
<html lang="en"><head><meta charset="utf-8"><meta name="viewport" content="width=device-width, initial-scale=1">
<meta http-equiv="Content-Security-Policy" content="default-src 'none'; style-src 'sha256-${hash}'; base-uri 'none'; form-action 'none'">
<title>${escaped(title)}: report</title><style>${STYLE}</style></head>
<body><header><h1>${escaped(title)}</h1>${account.pipeline.about === null ? "" : `<p class="lead">${escaped(account.pipeline.about)}</p>`}
${verdict(account)}${headline(account)}<nav aria-label="Contents"><ol>${contents}</ol></nav></header>
<main>
${body}
</main>
<footer><p class="lead">Made by forebay ${escaped(account.software.version)}. Every figure here is in the account beside this page, with more digits.</p></footer>
</body></html>
`;
}

function verdict({ verdict: v }: Account): string {
  return `<div class="verdict ${v.met ? "met" : "unmet"}"><p><strong>${
    v.met ? "All requirements and alias limits are met." : "Not met: read this first."
  }</strong></p>${v.remarks.map((r) => `<p>${escaped(r)}</p>`).join("")}</div>`;
}

function headline(account: Account): string {
  const { chain } = account;
  const rows = account.inputs.reduce((sum, i) => sum + i.rows.read, 0);
  const facts: [string, string][] = [
    ["went in", `${count(rows)} rows`],
    [
      "came out",
      `${count(account.outputs[0]?.rows ?? 0)} samples, one every ${duration(chain.out_interval_s)}`,
    ],
    ["late by", duration(chain.delay_s)],
  ];
  for (const { name } of account.channels) {
    const parts = measured(account)
      .filter((m) => m.name === name && (m.c.variance_removed_pct ?? 0) > 0)
      .map((m) => `${percent(m.c.variance_removed_pct)} by ${m.stage}`);
    if (parts.length > 0) facts.push([`variance taken from ${name}`, parts.join(", ")]);
  }
  return `<dl class="facts">${facts.map(([k, v]) => `<div><dt>${escaped(k)}</dt><dd>${escaped(v)}</dd></div>`).join("")}</dl>`;
}

/** Stages and channels whose removal was measured. */
function measured({ stages }: Account): { stage: string; name: string; c: ChannelAccount }[] {
  return stages.flatMap((s) =>
    Object.entries(s.channels)
      .filter(([, c]) => c.accounted && s.stage !== "report")
      .map(([name, c]) => ({ stage: `${s.place} ${s.stage}`, name, c })),
  );
}

function removed(account: Account): string {
  const list = measured(account);
  if (list.length === 0) return "<p>The chain has no report stage, so what was removed was not measured.</p>";
  return `<p>Each stage compared with its own input, sample by sample after the delay is taken out. What a stage did to
each band and tone stands in its own section below.</p>${htmlTable(
    "t-removed",
    "Taken out, stage by stage",
    ["stage", "channel", "variance removed", "rms removed", "strongest tone taken out", "by"],
    list.map(({ stage, name, c }) => {
      const tone = c.tones.find((t) => t.gain_dB < -3);
      return [
        stage,
        name,
        percent(c.variance_removed_pct),
        withUnit(c.rms_removed, c.unit),
        tone === undefined
          ? "none found"
          : `${withPeriod(tone.frequency_Hz)}, ${withUnit(tone.amplitude, c.unit)}`,
        tone === undefined ? "–" : dB(-tone.gain_dB),
      ];
    }),
  )}${wholeChain(account)}`;
}

/** All stages together, up to and with the filter of the first stage that drops samples. */
function wholeChain({ chain }: Account): string {
  const parts = Object.entries(chain.channels).flatMap(([name, c]) =>
    c.removal === null ? [] : channelSection(anchor("whole", name), `${name}: the whole chain`, c.removal),
  );
  if (parts.length === 0) return "";
  return `<p>All stages together, on the grid of the resampled input, up to and with the filter of the first stage
that drops samples:</p>${parts.join("")}`;
}

function inputs(account: Account): string {
  const files = htmlTable(
    "t-inputs",
    "Rows of each log: read = used + merged + set aside",
    ["file", "read", "used", "merged", "set aside", "came late, put in place"],
    account.inputs.map(({ file, rows }) => [
      file,
      count(rows.read),
      count(rows.used),
      count(rows.merged),
      count(Object.values(rows.set_aside).reduce((a, b) => a + b, 0)),
      count(rows.reordered),
    ]),
  );
  const aside = account.inputs.flatMap(({ file, rows }) =>
    Object.entries(rows.set_aside).map(([reason, n]) => [
      file,
      reason,
      count(n),
      (rows.set_aside_lines[reason] ?? []).join(", "),
    ]),
  );
  const cells = account.inputs.flatMap((input) =>
    account.channels
      .map(({ name }) => [
        input.file,
        name,
        count(input.missing_cells[name] ?? 0),
        count(input.unreadable_cells[name]?.count ?? 0),
        (input.unreadable_cells[name]?.lines ?? []).join(", "),
      ])
      .filter((row) => row[2] !== "0" || row[3] !== "0"),
  );
  const t = account.timing;
  const timing =
    t === null
      ? ""
      : `<p>The log runs from ${escaped(timeForPeople(t.first))} to ${escaped(timeForPeople(t.last))}, a row every ${escaped(
          duration(t.nominal_interval_s),
        )} (fitted ${escaped(withUnit(t.fitted_interval_s, "s", 8))}${
          t.drift_ppm === null
            ? ""
            : `; its clock drifts by ${escaped(number(Math.round(t.drift_ppm * 100) / 100))} ppm`
        }; jitter ${escaped(duration(t.jitter_sd_s))} rms). ${
          t.gap_count === 0
            ? "It has no gap."
            : `It has ${count(t.gap_count)} ${t.gap_count === 1 ? "gap" : "gaps"}, ${escaped(duration(t.gap_total_s))} in all.`
        }</p>`;
  const gaps =
    t === null || t.gaps.length === 0
      ? ""
      : htmlTable(
          "t-gaps",
          t.gap_count > t.gaps.length ? `The longest ${t.gaps.length} gaps` : "Gaps",
          ["from", "to", "length"],
          t.gaps.map((g) => [timeForPeople(g.from), timeForPeople(g.to), duration(g.length_s)]),
        );
  return [
    files,
    aside.length === 0
      ? ""
      : htmlTable(
          "t-aside",
          "Rows set aside, with their first lines",
          ["file", "reason", "rows", "first lines"],
          aside,
        ),
    cells.length === 0
      ? ""
      : htmlTable(
          "t-cells",
          "Cells without a value in rows used",
          ["file", "channel", "missing", "unreadable", "first lines"],
          cells,
        ),
    timing,
    gaps,
  ].join("");
}

function outputs(account: Account): string {
  const { chain } = account;
  const names = Object.keys(chain.channels);
  const states = htmlTable(
    "t-states",
    "Samples of the clean series by state",
    ["state", ...names],
    (
      Object.keys(
        chain.channels[names[0]!]?.counts ?? {},
      ) as (keyof (typeof chain.channels)[string]["counts"])[]
    ).map((state) => [state, ...names.map((n) => count(chain.channels[n]!.counts[state]))]),
  );
  const strips = names
    .map((n) =>
      stripPlot(
        anchor("strip", n),
        chain.channels[n]!,
        chain.first,
        `${n}: resampled input and clean series`,
      ),
    )
    .join("");
  return `<p>From ${escaped(timeForPeople(chain.first))} to ${escaped(timeForPeople(chain.last))}, a sample every ${escaped(
    duration(chain.out_interval_s),
  )}.</p>${states}${strips}`;
}

function delay(account: Account): string {
  const { chain, stages } = account;
  return `<p>The clean series is ${chain.delay_s === 0 ? "not late" : `late by ${escaped(duration(chain.delay_s))}`}. The value at a time t uses ${
    chain.look_ahead_s === null
      ? "the whole record"
      : `data up to t + ${escaped(duration(chain.look_ahead_s))}`
  }.${chain.rise_s === null ? "" : ` A sudden step rises from 10 to 90 % in ${escaped(duration(chain.rise_s))}.`}</p>${htmlTable(
    "t-delay",
    "Delay stage by stage",
    ["stage", "introduced", "compensated", "left", "looks ahead", "end zone", "10–90 % rise", "overshoot"],
    stages.map((s) => [
      `${s.place} ${s.stage}`,
      duration(s.delay.introduced_s),
      duration(s.delay.compensated_s),
      duration(s.delay.residual_s),
      duration(s.look_ahead_s),
      duration(s.end_s),
      s.rise_s === null ? "–" : duration(s.rise_s),
      s.overshoot_pct === null ? "–" : `${number(s.overshoot_pct, 3)} %`,
    ]),
  )}`;
}

function requirements(account: Account): string {
  return htmlTable(
    "t-requirements",
    "Requirements, on the design and on the data",
    ["requirement", "channel", "predicted", "measured", "margin", "verdict"],
    account.requirements.map((r) => [
      r.requirement,
      r.channel ?? "all",
      r.predicted ?? "–",
      r.measured ?? "–",
      r.margin ?? "–",
      r.met ? "met" : "NOT MET",
    ]),
  );
}

function record(account: Account): string {
  const digests = (
    caption: string,
    id: string,
    list: readonly { file: string; bytes: number; sha256: string }[],
  ) =>
    htmlTable(
      id,
      caption,
      ["file", "bytes", "sha256"],
      list.map((f) => [f.file, count(f.bytes), f.sha256]),
    ).replaceAll(/<td>([0-9a-f]{64})<\/td>/g, '<td class="digest">$1</td>');
  return `${digests("Logs read", "t-digests-in", account.inputs)}${digests("Files written with this page", "t-digests-out", account.outputs)}<p class="digest">Pipeline sha256 ${escaped(
    account.pipeline.sha256,
  )}</p><details><summary>The pipeline file</summary><pre>${escaped(account.pipeline.text)}</pre></details>`;
}
