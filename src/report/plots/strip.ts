import { scaleLinear, scaleUtc } from "d3-scale";
import { area } from "d3-shape";
import type { State, StripAccount } from "../account-format.ts";
import { number, timeForPeople } from "../text.ts";
import { clockFormat } from "./clock.ts";
import { BOTTOM, HEIGHT, LEFT, plot, RIGHT, type Scale, TOP, WIDTH } from "./frame.ts";

/** Lowest to highest value per column of time, resampled input behind, clean series before it; gaps stay open. */
export function stripPlot(
  id: string,
  channel: { readonly unit: string; readonly strip: StripAccount },
  first: string | null,
  title: string,
): string {
  const s = channel.strip;
  const values = [...s.in_low, ...s.in_high, ...s.out_low, ...s.out_high].filter(
    (v): v is number => v !== null,
  );
  if (values.length === 0) return "";
  const start = Date.parse(s.from);
  const columns = s.in_low.length;
  const at = (i: number) => start + i * s.column_s * 1000;
  const low = Math.min(...values);
  const high = Math.max(...values);
  const pad = high > low ? 0.05 * (high - low) : Math.max(1e-9, Math.abs(high) * 0.05);
  const x = scaleUtc()
    .domain([at(0), at(columns)])
    .range([LEFT, WIDTH - RIGHT]);
  const y = scaleLinear()
    .domain([low - pad, high + pad])
    .range([HEIGHT - BOTTOM, TOP]);
  const ticks = x.ticks(5);
  const format = clockFormat(ticks);
  const band = (kind: string, lows: readonly (number | null)[], highs: readonly (number | null)[]) => {
    const points = lows.flatMap((v, i) => {
      const w = highs[i] ?? null;
      // Each column is drawn over its whole width, so that a single one between gaps is still seen.
      return [
        { t: at(i), low: v, high: w },
        { t: at(i + 1), low: v, high: w },
      ];
    });
    const path = area<(typeof points)[number]>()
      .defined((p) => p.low !== null && p.high !== null)
      .x((p) => x(p.t))
      .y0((p) => y(p.low!) + 0.5)
      .y1((p) => y(p.high!) - 0.5)
      .digits(1);
    return `<path class="band ${kind}" d="${path(points) ?? ""}"/>`;
  };
  // The clean series has fewer samples than columns have room for: lines through its columns' lowest and highest,
  // which are one line where it hardly moves inside a column.
  const filled = s.out_low.flatMap((v, i) => {
    const w = s.out_high[i] ?? null;
    return v === null || w === null ? [] : [{ t: at(i) + s.column_s * 500, low: v, high: w, i }];
  });
  const spacing = Math.max(1, Math.round(columns / Math.max(1, filled.length)));
  const thin = filled.every((c) => c.high - c.low < 0.02 * (high - low));
  const through = (value: (c: (typeof filled)[number]) => number) => {
    const line: (readonly [number, number | null])[] = [];
    filled.forEach((c, n) => {
      const before = filled[n - 1];
      if (before !== undefined && c.i - before.i > 2 * spacing + 1) line.push([c.t, null]);
      line.push([c.t, value(c)]);
    });
    return line;
  };
  const after = thin
    ? [through((c) => (c.low + c.high) / 2)]
    : [through((c) => c.low), through((c) => c.high)];
  return plot({
    id,
    title,
    description: `From ${timeForPeople(s.from)}, ${columns} columns of ${number(s.column_s)} s; values from ${number(low)} to ${number(high)} ${channel.unit}.`,
    x: {
      scale: x as unknown as Scale,
      ticks: ticks.map((d) => ({ at: d.getTime(), text: format(d) })),
      label: first === null ? "time, UTC" : `time, UTC; the record begins ${timeForPeople(first)}`,
    },
    y: { scale: y, ticks: y.ticks(6).map((v) => ({ at: v, text: number(v, 6) })), label: channel.unit },
    traces: [
      { kind: "before", name: "before: lowest to highest", points: [] },
      ...after.map((points) => ({
        kind: "after" as const,
        name: thin ? "after" : "after: lowest and highest",
        points,
      })),
    ],
    under: band("before", s.in_low, s.in_high),
    extra: stateBar(s.out_state, (i) => x(at(i))),
    note: "The bar along the foot: thin where samples are measured, half high where they are flagged, full where there is none.",
  });
}

const BAR = 12;

/** A bar along the foot of the plot: its height tells the worst state of each column, and a title names it. */
function stateBar(states: readonly (State | null)[], x: (column: number) => number): string {
  let bar = "";
  for (let i = 0; i < states.length; ) {
    let state = states[i]!;
    let end = i + 1;
    // A column without a sample lies between two samples: it goes with the one before it.
    while (end < states.length && (states[end] === state || states[end] === null)) end++;
    state ??= "measured";
    const kind =
      state === "measured" ? "whole" : state === "missing" || state === "screened" ? "none" : "part";
    const height = kind === "whole" ? 2 : kind === "part" ? BAR / 2 : BAR;
    const left = x(i);
    const width = Math.max(0.8, x(end) - left);
    bar += `<rect class="state ${kind}" x="${left.toFixed(1)}" y="${(HEIGHT - BOTTOM - height).toFixed(1)}" width="${width.toFixed(1)}" height="${height}"><title>${state}</title></rect>`;
    i = end;
  }
  return bar;
}
