/**
 * `detrend`: takes a polynomial trend out of the record or of fixed spans of it.
 * Fitted by least squares in an orthogonal basis (see signal/polynomial-fit.ts) on a first pass.
 */
import type { z } from "zod";
import { count, durationOr, stageSettings } from "../pipeline/kinds.ts";
import { intervalSeconds, timeOf } from "../signal/grid.ts";
import { type LearnedTrend, TrendKernel, TrendLearner } from "../signal/trend-kernel.ts";
import { windowPoints } from "./parts/lengths.ts";
import type { DesignOutcome, Problem, Signal, Stage } from "./stage.ts";

/** Trends listed in the account; a year of days fits. */
const TRENDS_LISTED = 400;

const settings = stageSettings("detrend", {
  degree: count({
    min: 0,
    max: 5,
    default: 1,
    about: "Degree of the polynomial: 0 the mean, 1 a line, up to 5.",
  }),
  over: durationOr(["whole"], {
    default: "whole",
    about: "What one trend is fitted to: the whole record, or spans of this length anchored to the grid.",
  }),
});
type Settings = z.output<typeof settings>;

function design(s: Settings, signal: Signal, _selected: readonly number[]): DesignOutcome {
  const grid = signal.grid!;
  const interval = intervalSeconds(grid);
  const problems: Problem[] = [];
  const whole = s.over === "whole";
  const span = s.over === "whole" ? null : (windowPoints(s.over, grid, ["over"], 2 ** 40, problems) ?? 1);
  if (span !== null && span < s.degree + 2 && problems.length === 0)
    problems.push({
      code: "span-too-short",
      severity: "error",
      path: ["over"],
      problem: "a span holds too few samples for a trend of this degree",
      given: `${span} samples, degree ${s.degree}`,
      allowed: `at least ${s.degree + 2} samples`,
      todo: "use a longer span or a lower degree",
    });
  if (problems.some((p) => p.severity === "error")) return { design: null, problems };
  const what = ["the mean", "a straight line"][s.degree] ?? `a polynomial of degree ${s.degree}`;
  return {
    problems,
    design: {
      grid,
      says: `Took out ${what}, fitted by least squares to ${
        whole ? "the whole record" : `each span of ${(span ?? 0) * interval} s`
      }.`,
      settings: { degree: s.degree, over_s: span === null ? "whole" : span * interval },
      taps: null,
      delay: { samples: 0, indexSamples: 0, compensated_s: 0 },
      reach: span === null ? null : { before: span - 1, after: span - 1 },
      end_s: 0,
      keepEvery: 1,
      alias: null,
      notes: {},
      learn: (extent) => new TrendLearner(s.degree, span, extent),
      kernel: ({ learned }) => new TrendKernel(learned as LearnedTrend),
      learnedNotes: (learned, unit) => {
        const { trends, blankSpans } = learned as LearnedTrend;
        return {
          coefficient_units: Array.from({ length: s.degree + 1 }, (_, n) =>
            n === 0 ? unit : `${unit}/s${n === 1 ? "" : n}`,
          ),
          spans_without_trend: blankSpans,
          trends: [...trends.values()].slice(0, TRENDS_LISTED).map((t) => ({
            origin_us: timeOf(grid, t.firstIndex),
            first_us: timeOf(grid, t.firstIndex),
            last_us: timeOf(grid, t.lastIndex),
            samples: t.count,
            // Fitted against the sample index; handed out against seconds since the origin.
            coefficients: Array.from(t.powers, (a, n) => a / interval ** n),
          })),
        };
      },
    },
  };
}

export const detrend: Stage<typeof settings> = {
  name: "detrend",
  about: "Takes out the mean, a line or a polynomial trend, over the whole record or over fixed spans.",
  settings,
  design,
};
