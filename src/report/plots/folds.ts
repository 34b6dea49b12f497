import { scaleLinear } from "d3-scale";
import type { StageAccount } from "../account-format.ts";
import { hertz } from "../text.ts";
import { BOTTOM, HEIGHT, LEFT, plot, RIGHT, TOP, WIDTH } from "./frame.ts";

/** Zigzags drawn at most; beyond, the picture would be a grey block. */
const MOST = 80;

/** Where each frequency lands when samples are dropped: a zigzag; the band kept, mains and tones marked on it. */
export function foldPlot(id: string, stage: StageAccount, title: string): string {
  const { alias } = stage;
  if (alias === null || stage.in.interval_s === null || stage.out.interval_s === null) return "";
  const before = 0.5 / stage.in.interval_s;
  const after = 0.5 / stage.out.interval_s;
  const legs = Math.min(MOST, Math.ceil(before / after));
  const end = Math.min(before, legs * after);
  const x = scaleLinear()
    .domain([0, end])
    .range([LEFT, WIDTH - RIGHT]);
  const y = scaleLinear()
    .domain([0, after * 1.05])
    .range([HEIGHT - BOTTOM, TOP]);
  const points = Array.from(
    { length: legs + 1 },
    (_, m) => [Math.min(m * after, end), m % 2 === 0 ? 0 : after] as const,
  );
  const last = points.at(-1)!;
  if (last[0] < legs * after)
    points[legs] = [end, legs % 2 === 1 ? end - (legs - 1) * after : legs * after - end];
  const tones = Object.values(stage.channels).flatMap((c) =>
    c.tones.filter((t) => t.folds && t.amplitude > 1e-3 * (c.rms_in ?? 0)),
  );
  const marks = [
    ...stage.folds.map((f) => ({ f: f.frequency_Hz, lands: f.lands_at_Hz, text: `${f.frequency_Hz} Hz` })),
    ...tones
      .slice(0, 3)
      .map((t) => ({ f: t.frequency_Hz, lands: t.lands_at_Hz, text: hertz(t.frequency_Hz, 3) })),
  ].filter((m) => m.f <= end);
  const dots = marks
    .map(
      (m) =>
        `<circle class="mark" cx="${x(m.f).toFixed(1)}" cy="${y(m.lands).toFixed(1)}" r="5"><title>${m.text} lands at ${hertz(m.lands)}</title></circle>`,
    )
    .join("");
  const kept = y(alias.kept_to_Hz);
  return plot({
    id,
    title,
    description: `Frequencies from 0 to ${hertz(end)} fold into 0 to ${hertz(after)}; the band kept ends at ${hertz(alias.kept_to_Hz)}.`,
    x: { scale: x, ticks: x.ticks(6).map((v) => ({ at: v, text: hertz(v, 3) })), label: "frequency before" },
    y: { scale: y, ticks: y.ticks(5).map((v) => ({ at: v, text: hertz(v, 3) })), label: "lands at" },
    traces: [{ kind: "after", name: "", points }],
    under: `<rect class="kept" x="${LEFT}" y="${kept.toFixed(1)}" width="${WIDTH - RIGHT - LEFT}" height="${(HEIGHT - BOTTOM - kept).toFixed(1)}"/>`,
    extra: dots,
    note: "The shaded strip is the band kept: what the line brings into it from above the first corner must be filtered away. Dots are mains hum and tones found in the data.",
  });
}
