import { scaleLinear, scaleUtc } from "d3-scale";
import type { RemovalAccount } from "../account-format.ts";
import { number, timeForPeople } from "../text.ts";
import { clockFormat } from "./clock.ts";
import { BOTTOM, HEIGHT, LEFT, plot, RIGHT, type Scale, TOP, WIDTH } from "./frame.ts";

/** rms of what was removed, against time; stretches that could not be compared stay open. */
export function removalPlot(id: string, r: RemovalAccount, unit: string, title: string): string {
  const values = r.rms.filter((v): v is number => v !== null);
  if (values.length < 2) return "";
  const start = Date.parse(r.from);
  const at = (i: number) => start + i * r.column_s * 1000;
  const high = Math.max(...values) || 1;
  const x = scaleUtc()
    .domain([at(0), at(r.rms.length)])
    .range([LEFT, WIDTH - RIGHT]);
  const y = scaleLinear()
    .domain([0, high * 1.08])
    .range([HEIGHT - BOTTOM, TOP]);
  const ticks = x.ticks(5);
  const format = clockFormat(ticks);
  return plot({
    id,
    title,
    description: `From ${timeForPeople(r.from)}, columns of ${number(r.column_s)} s; from ${number(Math.min(...values))} to ${number(high)} ${unit}.`,
    x: {
      scale: x as unknown as Scale,
      ticks: ticks.map((d) => ({ at: d.getTime(), text: format(d) })),
      label: "time, UTC",
    },
    y: {
      scale: y,
      ticks: y.ticks(5).map((v) => ({ at: v, text: number(v) })),
      label: `rms removed, mean included, ${unit}`,
    },
    traces: [
      {
        kind: "removed",
        name: "",
        points: r.rms.flatMap((v, i) => [[at(i), v] as const, [at(i + 1), v] as const]),
      },
    ],
  });
}
