import { scaleLinear, scaleUtc } from "d3-scale";
import { area } from "d3-shape";
import type { RemovalAccount } from "../account-format.ts";
import { number, timeForPeople } from "../text.ts";
import { clockFormat } from "./clock.ts";
import { BOTTOM, HEIGHT, LEFT, plot, RIGHT, type Scale, TOP, WIDTH } from "./frame.ts";

/** What was removed against time: lowest to highest per column, and its rms; what could not be compared stays open. */
export function removalPlot(id: string, r: RemovalAccount, unit: string, title: string): string {
  const values = [...r.low, ...r.high, ...r.rms].filter((v): v is number => v !== null);
  if (r.rms.length < 2 || values.length === 0) return "";
  const start = Date.parse(r.from);
  const at = (i: number) => start + i * r.column_s * 1000;
  const low = Math.min(0, ...values);
  const high = Math.max(0, ...values);
  const pad = 0.05 * (high - low) || 1;
  const x = scaleUtc()
    .domain([at(0), at(r.rms.length)])
    .range([LEFT, WIDTH - RIGHT]);
  const y = scaleLinear()
    .domain([low - pad, high + pad])
    .range([HEIGHT - BOTTOM, TOP]);
  const ticks = x.ticks(5);
  const format = clockFormat(ticks);
  const columns = r.low.flatMap((v, i) => [
    { t: at(i), low: v, high: r.high[i] ?? null },
    { t: at(i + 1), low: v, high: r.high[i] ?? null },
  ]);
  const envelope = area<(typeof columns)[number]>()
    .defined((c) => c.low !== null && c.high !== null)
    .x((c) => x(c.t))
    .y0((c) => y(c.low!) + 0.5)
    .y1((c) => y(c.high!) - 0.5)
    .digits(1);
  return plot({
    id,
    title,
    description: `From ${timeForPeople(r.from)}, columns of ${number(r.column_s)} s; removed values from ${number(low)} to ${number(high)} ${unit}.`,
    x: {
      scale: x as unknown as Scale,
      ticks: ticks.map((d) => ({ at: d.getTime(), text: format(d) })),
      label: "time, UTC",
    },
    y: {
      scale: y,
      ticks: y.ticks(5).map((v) => ({ at: v, text: number(v) })),
      label: `removed, ${unit}`,
    },
    traces: [
      { kind: "removed", name: "lowest to highest", points: [] },
      {
        kind: "limit",
        name: "rms, mean included",
        points: r.rms.flatMap((v, i) => [[at(i), v] as const, [at(i + 1), v] as const]),
      },
    ],
    under: `<path class="band removed" d="${envelope(columns) ?? ""}"/>`,
  });
}
