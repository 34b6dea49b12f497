/** The ways to put rows onto a grid: who does it, and what it does to the spectrum. */

import type { Grid } from "../../signal/grid.ts";
import type { GridBlock } from "../../signal/grid-block.ts";
import { type Guess, LeaveOneOut } from "../../signal/leave-one-out.ts";
import { type Curve, type CurveEffect, RowCurves, SINC } from "../../signal/row-curves.ts";
import {
  type Between,
  type InterpolationEffect,
  meanPowerGain,
  RowInterpolator,
} from "../../signal/row-interpolation.ts";
import { RowMarks } from "../../signal/row-marks.ts";
import { localCubicWeights, meanPowerGainOver, sincWeights } from "../../signal/row-response.ts";
import type { RowKernel } from "../stage.ts";

export const ROW_METHODS = [
  "straight-line",
  "nearest-sample",
  "monotone-cubic",
  "local-cubic",
  "band-limited",
  "cell-mean",
] as const;
export type RowMethod = (typeof ROW_METHODS)[number];

const SAYS: Record<RowMethod, string> = {
  "straight-line": "on the straight line between neighbouring rows",
  "nearest-sample": "each grid time taking the nearest row",
  "monotone-cubic": "on cubics that never leave the range of the two rows around",
  "local-cubic": "on cubics through the rows, with slopes from near neighbours",
  "band-limited": "by a windowed sinc over 16 rows on either side",
  "cell-mean": "each grid time taking the mean over its cell",
};

export const methodSays = (method: RowMethod): string => SAYS[method];

const isCurve = (method: RowMethod): method is Curve & RowMethod =>
  method !== "straight-line" && method !== "nearest-sample";

/** Rows beyond the next one that a grid time may look at. */
export function rowsBeyond(method: RowMethod): number {
  if (method === "band-limited") return SINC.half + 1;
  return method === "monotone-cubic" || method === "local-cubic" ? 1 : 0;
}

/** @param marked  rows come with marks, which go on to the samples made of them */
export function rowKernelFor(
  method: RowMethod,
  grid: Grid,
  longestGap_us: number,
  marked: boolean,
): RowKernel {
  const rows = isCurve(method)
    ? new RowCurves(grid, method, longestGap_us)
    : new RowInterpolator(grid, method as Between, longestGap_us);
  const check =
    method === "band-limited" || method === "cell-mean"
      ? null
      : new LeaveOneOut(method as Guess, longestGap_us);
  const effect = () => ({
    ...rows.effect(),
    ...(check === null ? {} : { left_out_rows: check.count, left_out_rms: check.rms() }),
  });
  if (!marked)
    return {
      push(times, values, count, emit) {
        check?.push(times, values, count);
        rows.push(times, values, count, emit);
      },
      flush: (emit) => rows.flush(emit),
      effect,
    };
  const marks = new RowMarks(grid, {
    longestGap_us,
    nearest: method === "nearest-sample",
    beyond: rowsBeyond(method),
    cell: method === "cell-mean",
  });
  const take = (block: GridBlock) => marks.take(block);
  return {
    push(times, values, count, emit, rowMarks) {
      if (rowMarks === undefined) throw new Error("these rows come with marks");
      check?.push(times, values, count);
      marks.see(times, values, rowMarks, count);
      rows.push(times, values, count, take);
      marks.handOn(false, emit);
    },
    flush(emit) {
      rows.flush(take);
      marks.handOn(true, emit);
    },
    effect,
  };
}

/**
 * Mean power gain at f over the places that occurred, for rows every rowInterval_s; null where the method is not
 * linear (monotone cubic), so that it has no response.
 */
export function rowPowerGain(
  method: RowMethod,
  effect: Record<string, unknown>,
  f_Hz: number,
  rowInterval_s: number,
  cell_s: number,
): number | null {
  const cycles = f_Hz * rowInterval_s;
  const curve = effect as unknown as CurveEffect;
  switch (method) {
    case "straight-line":
      return meanPowerGain((effect as unknown as InterpolationEffect).blend, f_Hz, rowInterval_s);
    case "local-cubic":
      return meanPowerGainOver(localCubicWeights, curve.places, curve.exact, cycles);
    case "band-limited":
      return meanPowerGainOver(sincWeights(SINC), curve.places, curve.exact, cycles);
    case "cell-mean": {
      // Of the line through the rows the cell takes the mean: sin(pi f T) / (pi f T); the line itself is left out.
      const x = Math.PI * f_Hz * cell_s;
      return x === 0 ? 1 : (Math.sin(x) / x) ** 2;
    }
    case "nearest-sample": {
      // Times displaced at random by s rms: the coherent gain is e^(-(2 pi f s)^2 / 2), for small displacements.
      const displaced = (effect as unknown as InterpolationEffect).displaced_rms_s;
      return Math.exp(-((2 * Math.PI * f_Hz * displaced) ** 2));
    }
    case "monotone-cubic":
      return null;
  }
}
