import { scaleLinear } from "d3-scale";
import type { StageAccount } from "../account-format.ts";
import { hertz, number } from "../text.ts";
import { BOTTOM, HEIGHT, LEFT, plot, RIGHT, TOP, WIDTH } from "./frame.ts";

const DEEPEST_dB = -140;

/** |H| in dB from 0 to the Nyquist frequency of the stage's input. */
export function responsePlot(id: string, stage: StageAccount, title: string): string {
  const { response } = stage;
  if (response === null) return "";
  const { frequency_Hz: f, gain_dB: g } = response;
  const top = Math.max(5, Math.ceil(Math.max(...g) / 5) * 5);
  const low = Math.max(DEEPEST_dB, Math.floor(Math.min(...g) / 20) * 20);
  const x = scaleLinear()
    .domain([0, f.at(-1)!])
    .range([LEFT, WIDTH - RIGHT]);
  const y = scaleLinear()
    .domain([Math.min(low, -20), top])
    .range([HEIGHT - BOTTOM, TOP]);
  return plot({
    id,
    title,
    description: `Gain in decibels against frequency from 0 to ${hertz(f.at(-1)!)}; ${number(g[0])} dB at 0 Hz, ${number(g.at(-1))} dB at the end.`,
    x: { scale: x, ticks: x.ticks(6).map((at) => ({ at, text: hertz(at, 3) })), label: "frequency" },
    y: { scale: y, ticks: y.ticks(7).map((at) => ({ at, text: number(at) })), label: "gain, dB" },
    traces: [
      { kind: "after", name: "", points: f.map((a, i) => [a, Math.max(y.domain()[0]!, g[i]!)] as const) },
    ],
  });
}
