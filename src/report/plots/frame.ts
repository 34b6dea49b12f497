/** What all plots share: the drawing area, axes with ticks and grid, lines with their dashes. */
import type { ScaleContinuousNumeric } from "d3-scale";
import { line } from "d3-shape";
import { escaped } from "../html.ts";

export const WIDTH = 720;
export const HEIGHT = 300;
export const LEFT = 78;
export const RIGHT = 40;
export const TOP = 14;
export const BOTTOM = 46;

export type Scale = ScaleContinuousNumeric<number, number>;

export interface Axis {
  readonly scale: Scale;
  readonly ticks: readonly { readonly at: number; readonly text: string }[];
  readonly label: string;
}

/** How each trace is drawn: colour is never the only sign. */
export type TraceKind = "before" | "after" | "removed" | "limit";

export interface Trace {
  readonly kind: TraceKind;
  readonly name: string;
  readonly points: readonly (readonly [number, number | null])[];
}

const f = (x: number): string => String(Math.round(x * 10) / 10);

/** A whole plot as SVG: title and description for those who do not see it. */
export function plot(options: {
  readonly id: string;
  readonly title: string;
  readonly description: string;
  readonly x: Axis;
  readonly y: Axis;
  readonly traces: readonly Trace[];
  readonly extra?: string;
  /** Said below the picture, beside the title. */
  readonly note?: string;
  /** Drawn below the traces. */
  readonly under?: string;
}): string {
  const { id, x, y } = options;
  const bottom = HEIGHT - BOTTOM;
  const right = WIDTH - RIGHT;
  const xTicks = x.ticks
    .map(({ at, text }) => {
      const px = f(x.scale(at));
      return `<path class="grid" d="M${px} ${TOP}V${bottom}"/><text x="${px}" y="${bottom + 18}" text-anchor="middle">${escaped(text)}</text>`;
    })
    .join("");
  const yTicks = y.ticks
    .map(({ at, text }) => {
      const py = f(y.scale(at));
      return `<path class="grid" d="M${LEFT} ${py}H${right}"/><text x="${LEFT - 6}" y="${py}" dy="0.32em" text-anchor="end">${escaped(text)}</text>`;
    })
    .join("");
  const traces = options.traces
    .map((t) => `<path class="trace ${t.kind}" d="${tracePath(t, x.scale, y.scale)}"/>`)
    .join("");
  return `<figure><svg id="${id}" class="plot" viewBox="0 0 ${WIDTH} ${HEIGHT}" role="img" aria-labelledby="${id}-t ${id}-d"><title id="${id}-t">${escaped(
    options.title,
  )}</title><desc id="${id}-d">${escaped(options.description)}</desc>${xTicks}${yTicks}<path class="axis" d="M${LEFT} ${TOP}V${bottom}H${right}"/><text class="label" x="${
    (LEFT + right) / 2
  }" y="${HEIGHT - 8}" text-anchor="middle">${escaped(x.label)}</text><text class="label" transform="translate(14 ${(TOP + bottom) / 2}) rotate(-90)" text-anchor="middle">${escaped(
    y.label,
  )}</text>${options.under ?? ""}${traces}${options.extra ?? ""}</svg>${legend(options.traces)}<figcaption>${escaped(options.note === undefined ? options.title : `${options.title}. ${options.note}`)}</figcaption></figure>`;
}

function tracePath(trace: Trace, x: Scale, y: Scale): string {
  const path = line<readonly [number, number | null]>()
    .defined(([, v]) => v !== null && Number.isFinite(v))
    .x(([a]) => x(a))
    .y(([, v]) => Math.min(HEIGHT - BOTTOM, Math.max(TOP, y(v!))))
    .digits(1);
  return path(trace.points) ?? "";
}

/** Each trace named beside a piece of its own line. */
function legend(traces: readonly Trace[]): string {
  const seen = traces.filter((t, i) => traces.findIndex((u) => u.kind === t.kind) === i && t.name !== "");
  if (seen.length < 2) return "";
  return `<p class="legend">${seen
    .map(
      (t) =>
        `<span><svg viewBox="0 0 34 10" aria-hidden="true">${t.points.length === 0 ? `<path class="band ${t.kind}" d="M1 1H33V9H1Z"/>` : `<path class="trace ${t.kind}" d="M1 5H33"/>`}</svg>${escaped(t.name)}</span>`,
    )
    .join(" ")}</p>`;
}

/** Powers of ten between two values, thinned to at most `most`. */
export function decades(low: number, high: number, most: number): number[] {
  const from = Math.ceil(Math.log10(low) - 1e-9);
  const to = Math.floor(Math.log10(high) + 1e-9);
  const step = Math.max(1, Math.ceil((to - from + 1) / most));
  const list: number[] = [];
  for (let e = from; e <= to; e += step) list.push(10 ** e);
  return list;
}

const RAISED = "⁰¹²³⁴⁵⁶⁷⁸⁹";
/** 10⁻³ */
export function powerOfTen(x: number): string {
  const e = Math.round(Math.log10(x));
  if (e >= 0 && e <= 3) return String(10 ** e);
  return `10${[...String(e)].map((c) => (c === "-" ? "⁻" : RAISED[Number(c)])).join("")}`;
}
