import { scaleLog } from "d3-scale";
import type { SpectrumAccount } from "../account-format.ts";
import { hertz, squared } from "../text.ts";
import { BOTTOM, decades, HEIGHT, LEFT, plot, powerOfTen, RIGHT, TOP, WIDTH } from "./frame.ts";

/** Dynamic range shown below the highest density: what lies deeper is rounding. */
const RANGE = 1e14;

/** Power spectral density before, after and removed, log-log, with the 95 % interval as a bar. */
export function psdPlot(id: string, s: SpectrumAccount, unit: string, title: string): string {
  const all = [...s.psd_in, ...s.psd_out, ...s.psd_removed].filter((p) => p > 0);
  const f = s.frequency_Hz;
  if (all.length === 0 || f.length < 2) return "";
  const high = Math.max(...all);
  const low = Math.max(Math.min(...all), high / RANGE);
  const x = scaleLog()
    .domain([f[0]!, f.at(-1)!])
    .range([LEFT, WIDTH - RIGHT]);
  const y = scaleLog()
    .domain([low / 1.5, high * 3])
    .range([HEIGHT - BOTTOM, TOP]);
  const points = (p: readonly number[]) => f.map((a, i) => [a, p[i]! > 0 ? p[i]! : null] as const);
  const ticks = decades(f[0]!, f.at(-1)!, 7);
  // The bar: a density read as 1 may truly be anything from lower to upper.
  const bar = Math.sqrt(high * low);
  const px = WIDTH - RIGHT - 22;
  const [a, b] = [y(bar * s.interval_95.upper), y(bar * s.interval_95.lower)];
  const interval = `<path class="interval" d="M${px - 5} ${a.toFixed(1)}h10m-5 0V${b.toFixed(1)}m-5 0h10"/><text x="${px - 9}" y="${((a + b) / 2).toFixed(1)}" dy="0.32em" text-anchor="end">95 %</text>`;
  return plot({
    id,
    title,
    description: `Density before, after and removed from ${hertz(f[0]!)} to ${hertz(f.at(-1)!)}; highest ${high.toPrecision(3)} ${squared(unit)}/Hz. The figures are in the account.`,
    x: {
      scale: x,
      ticks: (ticks.length > 1 ? ticks : x.ticks(3)).map((at) => ({ at, text: hertz(at, 2) })),
      label: "frequency",
    },
    y: {
      scale: y,
      ticks: decades(low / 1.5, high * 3, 7).map((at) => ({ at, text: powerOfTen(at) })),
      label: `PSD, ${squared(unit)}/Hz`,
    },
    traces: [
      { kind: "removed", name: "removed", points: points(s.psd_removed) },
      { kind: "before", name: "before", points: points(s.psd_in) },
      { kind: "after", name: "after", points: points(s.psd_out) },
    ],
    extra: interval,
  });
}
