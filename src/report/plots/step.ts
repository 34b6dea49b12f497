import { scaleLinear } from "d3-scale";
import type { StageAccount } from "../account-format.ts";
import { duration, number } from "../text.ts";
import { BOTTOM, HEIGHT, LEFT, plot, RIGHT, TOP, WIDTH } from "./frame.ts";

/** Answer to a sudden step of 1, by time since the step reached the middle of the filter. */
export function stepPlot(id: string, stage: StageAccount, title: string): string {
  const { step } = stage;
  if (step === null) return "";
  const { time_s: t, value: v } = step;
  const low = Math.min(0, ...v);
  const high = Math.max(1, ...v);
  const pad = 0.06 * (high - low);
  const x = scaleLinear()
    .domain([t[0]!, t.at(-1)!])
    .range([LEFT, WIDTH - RIGHT]);
  const y = scaleLinear()
    .domain([low - pad, high + pad])
    .range([HEIGHT - BOTTOM, TOP]);
  return plot({
    id,
    title,
    description: `From ${number(v[0])} to ${number(v.at(-1))}; lowest ${number(Math.min(...v))}, highest ${number(Math.max(...v))}; 10 to 90 % in ${duration(stage.rise_s)}.`,
    x: {
      scale: x,
      ticks: x.ticks(6).map((at) => ({ at, text: duration(at) })),
      label: "time since the step reached the middle of the filter",
    },
    y: {
      scale: y,
      ticks: y.ticks(6).map((at) => ({ at, text: number(at) })),
      label: "answer to a step of 1",
    },
    traces: [{ kind: "after", name: "", points: t.map((a, i) => [a, v[i]!] as const) }],
  });
}
