/**
 * `resample`: puts rows with times of their own onto an even grid anchored to the epoch.
 * See signal/row-interpolation.ts for what is put where, and what straight-line interpolation does to the
 * spectrum.
 */
import type { z } from "zod";
import { duration, instant, oneOf, rate, stageSettings, truth } from "../pipeline/kinds.ts";
import { intervalSeconds, isGridInterval, makeGrid } from "../signal/grid.ts";
import { methodSays, ROW_METHODS, rowKernelFor, rowPowerGain, rowsBeyond } from "./parts/row-methods.ts";
import type { DesignOutcome, GridDesign, Problem, Signal, Stage } from "./stage.ts";

/** Share by which the grid may be longer than the log's own interval before it counts as longer. */
const LONGER_BY = 1.02;

const settings = stageSettings("resample", {
  interval: duration({ about: "Sample interval of the grid." }).optional(),
  rate: rate({ about: "Sampling rate of the grid, instead of its interval." }).optional(),
  between: oneOf(ROW_METHODS, {
    default: "straight-line",
    about:
      "Value between rows: on the straight line, the nearer row, on cubics (monotone ones never overshoot), by a windowed sinc (nearly even clocks only), or the mean of the grid cell.",
  }),
  "longest-gap": duration({
    about:
      "Rows farther apart than this are not joined: the grid is blank between them; default 2 intervals.",
  }).optional(),
  anchor: instant({ about: "A time on which a grid sample falls; default 1970-01-01T00:00:00Z." }).optional(),
  "accept-aliasing": truth({
    default: false,
    about: "Allow an interval longer than the log's own without a filter against aliases; recorded.",
  }),
});
type Settings = z.output<typeof settings>;

function design(s: Settings, signal: Signal, selected: readonly number[]): DesignOutcome<GridDesign> {
  const problems: Problem[] = [];
  if (selected.length !== signal.channels.length)
    problems.push({
      code: "resample-some-channels",
      severity: "error",
      path: ["channels"],
      problem: "all channels of a series share one grid, so all must be resampled",
      given: `${selected.length} of ${signal.channels.length} channels`,
      allowed: "all channels",
      todo: "leave channels out, or write another pipeline for the others",
    });
  if ((s.interval === undefined) === (s.rate === undefined)) {
    problems.push({
      code: "grid-interval",
      severity: "error",
      path: [],
      problem: "resample needs the grid's interval once",
      given: s.interval === undefined ? "neither interval nor rate" : "both interval and rate",
      allowed: "one of interval, rate",
      todo: "keep one of them",
    });
    return { design: null, problems };
  }
  const step = s.interval?.us ?? s.rate!.interval_us;
  if (!isGridInterval(step.num, step.den)) {
    problems.push({
      code: "grid-interval-range",
      severity: "error",
      path: [s.interval === undefined ? "rate" : "interval"],
      problem: "times are held in whole microseconds, and this grid is finer",
      given: (s.interval ?? s.rate!).text,
      allowed: "an interval of 1 us or more",
      todo: "use a longer interval, or correct the unit",
    });
    return { design: null, problems };
  }
  const grid = makeGrid(step.num, step.den, s.anchor?.us ?? 0);
  const interval = intervalSeconds(grid);
  const longestGap_us =
    s["longest-gap"] === undefined ? 2e6 * interval : s["longest-gap"].us.num / s["longest-gap"].us.den;
  if (longestGap_us < 1e6 * interval)
    problems.push({
      code: "longest-gap-short",
      severity: "error",
      path: ["longest-gap"],
      problem: "a longest gap shorter than the grid's interval leaves nothing to join",
      given: s["longest-gap"]!.text,
      allowed: `at least ${interval} s`,
      todo: `write ${2 * interval} s to bridge one lost row`,
    });
  if (problems.length > 0) return { design: null, problems };
  const ahead = (1 + rowsBeyond(s.between)) * (longestGap_us / 1e6 / interval);
  return {
    problems,
    design: {
      grid,
      says: `Put the rows onto an even grid of ${interval} s, ${methodSays(s.between)}; rows more than ${longestGap_us / 1e6} s apart are not joined.`,
      settings: {
        interval_s: interval,
        between: s.between,
        "longest-gap_s": longestGap_us / 1e6,
        anchor: s.anchor?.text ?? "1970-01-01T00:00:00Z",
        "accept-aliasing": s["accept-aliasing"],
      },
      taps: null,
      delay: { samples: 0, indexSamples: 0, compensated_s: 0 },
      reach: {
        before: Math.ceil(ahead),
        after: Math.ceil(ahead),
      },
      end_s: 0,
      keepEvery: 1,
      alias: null,
      notes: {},
      kernel: () => {
        throw new Error("resample works on rows");
      },
      rowKernel: ({ marked }) => rowKernelFor(s.between, grid, longestGap_us, marked),
      checkInterval: (nominal_s) => checkInterval(s, interval, longestGap_us / 1e6, nominal_s),
      interpolation: {
        between: s.between,
        meanPowerGain: (effect, f_Hz, row_s) => rowPowerGain(s.between, effect, f_Hz, row_s, interval),
      },
    },
  };
}

/** What only the log's own interval shows: aliasing by a longer interval, and a gap limit that joins nothing. */
function checkInterval(s: Settings, interval_s: number, longestGap_s: number, nominal_s: number): Problem[] {
  const problems: Problem[] = [];
  const text = (x: number) => `${Number(x.toPrecision(6))} s`;
  if (interval_s > LONGER_BY * nominal_s && !s["accept-aliasing"])
    problems.push({
      code: "resample-aliases",
      severity: "error",
      path: [s.interval === undefined ? "rate" : "interval"],
      problem: "the grid is coarser than the log, and resampling has no filter against aliases",
      given: `${text(interval_s)}; the log has a row every ${text(nominal_s)}`,
      allowed: `an interval up to ${text(nominal_s)}`,
      todo: `resample to ${text(nominal_s)}, then decimate to ${text(interval_s)}; or set accept-aliasing: true to go on and have it recorded`,
    });
  if (longestGap_s < nominal_s)
    problems.push({
      code: "longest-gap-below-log",
      severity: "error",
      path: ["longest-gap"],
      problem: "the longest gap is shorter than the log's own interval, so no two rows would be joined",
      given: `${text(longestGap_s)}; the log has a row every ${text(nominal_s)}`,
      allowed: `at least ${text(nominal_s)}`,
      todo: `write ${text(3 * nominal_s)} to bridge two lost rows`,
    });
  return problems;
}

export const resample: Stage<typeof settings> = {
  name: "resample",
  about: "Puts rows with times of their own onto an even grid; every chain that smooths needs it first.",
  settings,
  design,
};
