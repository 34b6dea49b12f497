/** One stage of the report: its sentence, its pictures, its figures. */
import type { ChannelAccount, StageAccount } from "./account-format.ts";
import { anchor, escaped, htmlTable } from "./html.ts";
import { rowFindings } from "./page-rows.ts";
import { foldPlot } from "./plots/folds.ts";
import { psdPlot } from "./plots/psd.ts";
import { removalPlot } from "./plots/removal.ts";
import { responsePlot } from "./plots/response.ts";
import { stepPlot } from "./plots/step.ts";
import { stripPlot } from "./plots/strip.ts";
import {
  count,
  dB,
  duration,
  edges,
  hertz,
  number,
  percent,
  squared,
  timeForPeople,
  withPeriod,
  withUnit,
} from "./text.ts";

export function stageSection(s: StageAccount): string {
  return [
    `<p>${escaped(s.says)}</p>`,
    rowFindings(s),
    figures(s),
    alias(s),
    responsePlot(anchor("response", s.place), s, `Stage ${s.place}, ${s.stage}: gain against frequency`),
    stepPlot(anchor("step", s.place), s, `Stage ${s.place}, ${s.stage}: answer to a sudden step`),
    foldPlot(anchor("folds", s.place), s, `Stage ${s.place}, ${s.stage}: where frequencies land`),
    folds(s),
    ...Object.entries(s.channels).map(([name, c]) => channel(s, name, c)),
    details(s),
  ].join("");
}

function figures(s: StageAccount): string {
  if (s.gain === null) return "";
  return htmlTable(
    `t-gain-${s.place}`,
    "The filter",
    ["figure", "value"],
    [
      ["taps", s.taps === null ? "–" : count(s.taps)],
      ["gain at 0 Hz", number(s.gain.dc, 6)],
      ["−1 dB at", edges(s.gain.f_1dB_Hz)],
      ["−3 dB at", edges(s.gain.f_3dB_Hz)],
      ["−6 dB at", edges(s.gain.f_6dB_Hz)],
      ["equivalent noise bandwidth", hertz(s.enbw_Hz)],
    ],
  );
}

function alias({ alias: a, place }: StageAccount): string {
  if (a === null) return "";
  const onData =
    a.ratio_dB === null
      ? "not measured: no gap-free stretch was long enough, or nothing folds"
      : `${dB(a.ratio_dB)} in ${hertz(a.worst_band?.from_Hz)} to ${hertz(a.worst_band?.to_Hz)} of ${a.worst_channel}; most of it from ${withPeriod(
          a.source_Hz,
        )}, which lands at ${withPeriod(a.lands_at_Hz)}`;
  return htmlTable(
    `t-alias-${place}`,
    "What folds into the band kept",
    ["check", "value"],
    [
      ["band kept", `0 to ${withPeriod(a.kept_to_Hz)}`],
      ["filter against aliases", a.anti_alias],
      ["limit", dB(a.limit_dB)],
      [
        "worst on the design",
        `${dB(a.design_worst_gain_dB)} at ${withPeriod(a.design_source_Hz)}${a.design_met ? "" : "; accepted in the pipeline"}`,
      ],
      ["worst on the data", onData],
      ["verdict", a.met ? "met" : "NOT MET"],
    ],
  );
}

function folds(s: StageAccount): string {
  if (s.folds.length === 0) return "";
  return htmlTable(
    `t-folds-${s.place}`,
    "Where mains hum and its harmonics land",
    ["frequency", "lands at", "gain before", "spectrum"],
    s.folds.map((f) => [
      hertz(f.frequency_Hz),
      withPeriod(f.lands_at_Hz),
      dB(f.gain_dB),
      f.inverted ? "turned round" : "upright",
    ]),
  );
}

function channel(s: StageAccount, name: string, c: ChannelAccount): string {
  return c.accounted && s.stage !== "report" ? channelSection(anchor("s", s.place, name), name, c) : "";
}

/** What was taken out of one channel: figures, bands, tones, spectrum, and when. */
export function channelSection(id: string, name: string, c: ChannelAccount): string {
  const rows: string[][] = [
    ["samples compared", count(c.samples)],
    ["mean", `${withUnit(c.mean_in, c.unit, 6)} → ${withUnit(c.mean_out, c.unit, 6)}`],
    ["rms about the mean", `${withUnit(c.rms_in, c.unit)} → ${withUnit(c.rms_out, c.unit)}`],
    ["rms removed", withUnit(c.rms_removed, c.unit)],
    ["variance removed", percent(c.variance_removed_pct)],
    ["measured on", c.basis ?? "–"],
    [
      "late, stated and by cross-correlation",
      c.delay_measured === null
        ? "–"
        : `${duration(c.delay_measured.stated_s)}; ${duration(c.delay_measured.delay_s)} (correlation ${number(c.delay_measured.correlation)})`,
    ],
  ];
  const e = c.extremes;
  if (e !== null) {
    const at = (x: { value: number; time: string } | null) =>
      x === null ? "–" : `${withUnit(x.value, c.unit, 6)} at ${timeForPeople(x.time)}`;
    rows.push(
      ["highest before", at(e.highest_in)],
      ["highest after", at(e.highest_out)],
      ["lowest before", at(e.lowest_in)],
      ["lowest after", at(e.lowest_out)],
      ["height that the highest lost", withUnit(e.height_lost, c.unit)],
      ["depth that the lowest lost", withUnit(e.depth_lost, c.unit)],
    );
  }
  const bands =
    c.bands.length === 0
      ? ""
      : htmlTable(
          `t-bands-${id}`,
          `${name}: power in ${squared(c.unit)} by band: before = after + removed + cross`,
          [
            "band",
            "from",
            "to",
            "before",
            "after",
            "removed",
            "cross",
            "after, predicted",
            "as predicted",
            "finding",
          ],
          c.bands.map((b) => [
            b.name,
            hertz(b.from_Hz),
            hertz(b.to_Hz),
            number(b.p_in),
            number(b.p_out),
            number(b.p_removed),
            number(b.cross),
            number(b.predicted_out),
            b.as_predicted === null ? "–" : b.as_predicted ? "yes" : "no",
            b.finding,
          ]),
        );
  const tones =
    c.tones.length === 0
      ? ""
      : htmlTable(
          `t-tones-${id}`,
          `${name}: strongest tones before (of a thousand spectra of noise alone, one would show a false one)`,
          ["frequency", "amplitude before", "gain", "afterwards at"],
          c.tones.map((t) => [
            withPeriod(t.frequency_Hz),
            withUnit(t.amplitude, c.unit),
            dB(t.gain_dB),
            t.folds ? `${withPeriod(t.lands_at_Hz)}, folded` : withPeriod(t.lands_at_Hz),
          ]),
        );
  const overlay =
    c.strip === null
      ? ""
      : stripPlot(`strip-${id}`, { unit: c.unit, strip: c.strip }, null, `${name}: before and after`);
  const r = c.removal;
  const removal =
    r === null
      ? ""
      : `${removalPlot(`removal-${id}`, r, c.unit, `${name}: when it was removed`)}${
          r.events.length === 0
            ? ""
            : htmlTable(
                `t-events-${id}`,
                `${name}: largest single removals`,
                ["time", "removed", "times the rms"],
                r.events.map((e) => [
                  timeForPeople(e.time),
                  withUnit(e.removed, c.unit),
                  number(e.times_rms, 3),
                ]),
              )
        }`;
  const p = c.spectrum;
  const spectrum =
    p === null
      ? "<p>No spectrum: no gap-free stretch was as long as a segment.</p>"
      : `${psdPlot(`psd-${id}`, p, c.unit, `${name}: power spectral density before, after and removed`)}<p>${escaped(
          `${p.window[0]!.toUpperCase()}${p.window.slice(1)} window, ${p.segment_samples} samples a segment, ${p.overlap_pct} % overlap, ${count(p.segments)} segments, ${number(
            p.degrees_of_freedom,
          )} degrees of freedom; bins ${hertz(p.resolution_Hz)} apart, noise bandwidth ${hertz(p.enbw_Hz)}. True values lie with 95 % probability between ${number(
            p.interval_95.lower,
            3,
          )} and ${number(p.interval_95.upper, 3)} times those shown.`,
        )}</p>`;
  return `<h3 id="${id}">${escaped(name)}</h3>${htmlTable(`t-removed-${id}`, `${name}: what was taken out`, ["figure", "value"], rows)}${overlay}${bands}${tones}${spectrum}${removal}`;
}

function details(s: StageAccount): string {
  const coefficients =
    s.coefficients === null
      ? ""
      : `<details><summary>${count(s.coefficients.length)} coefficients</summary><pre>${s.coefficients.join("\n")}</pre></details>`;
  const notes =
    Object.keys(s.notes).length === 0
      ? ""
      : `<details><summary>More figures</summary><pre>${escaped(JSON.stringify(s.notes, null, 2))}</pre></details>`;
  return `<details><summary>Settings as resolved</summary><pre>${escaped(JSON.stringify(s.settings, null, 2))}</pre></details>${coefficients}${notes}`;
}
