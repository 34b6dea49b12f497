import { type Grid, intervalSeconds } from "../signal/grid.ts";
import { SpectrumPlan } from "../signal/welch.ts";
import type { ReportSettings } from "../stages/stage.ts";
import type { Scope } from "./scope.ts";

/** Longest segment, in samples: keeps transforms within some tens of megabytes. */
export const LONGEST_SEGMENT = 2 ** 18;
const DEFAULT_LONGEST = 4096;
const SHORTEST = 16;
/** Bins of the band kept that the alias check wants: fewer, and bands could not be told apart. */
const ALIAS_BINS_KEPT = 64;

/** Smallest power of two not below n. */
export const powerOfTwoFrom = (n: number): number => 2 ** Math.max(1, Math.ceil(Math.log2(n) - 1e-12));

/** Segment that gives at least the resolution asked for at a grid's rate, in samples. */
export function segmentFor(interval_s: number, resolution_Hz: number): number {
  return Math.max(SHORTEST, powerOfTwoFrom(1 / (resolution_Hz * interval_s)));
}

/** The transforms' sizes, one plan a size, chosen from the report's settings and the record's length. */
export class SpectrumPlans {
  private readonly report: ReportSettings | null;
  private readonly span_s: number;
  private readonly made = new Map<string, SpectrumPlan>();

  /** @param extent  where rows exist; the length of record on which a default resolution rests */
  constructor(report: ReportSettings | null, extent: Scope) {
    this.report = report;
    this.span_s = (extent.until_us - extent.from_us) / 1e6;
  }

  /** Plan for a node that a report accounts for; null without a report. */
  forNode(grid: Grid): SpectrumPlan | null {
    if (this.report === null) return null;
    const interval = intervalSeconds(grid);
    const segment =
      this.report.resolution_Hz === null
        ? this.defaultSegment(interval)
        : segmentFor(interval, this.report.resolution_Hz);
    return this.plan(segment, interval);
  }

  /** Plan for the alias check before samples are dropped: fine enough to tell bands of the new rate apart. */
  forAlias(grid: Grid, keepEvery: number): SpectrumPlan {
    const interval = intervalSeconds(grid);
    const wanted = Math.min(LONGEST_SEGMENT, powerOfTwoFrom(2 * ALIAS_BINS_KEPT * keepEvery));
    // A short record still gets a check, with wider bands.
    const longest = Math.max(SHORTEST, powerOfTwoFrom(this.span_s / interval / 2 + 1) / 2);
    return this.plan(Math.min(wanted, longest), interval);
  }

  /** About eight half-overlapping segments over the record, so that figures have degrees of freedom. */
  private defaultSegment(interval_s: number): number {
    const samples = this.span_s / interval_s;
    return Math.min(DEFAULT_LONGEST, Math.max(SHORTEST, powerOfTwoFrom(samples / 4.5 + 1) / 2));
  }

  private plan(segment: number, interval_s: number): SpectrumPlan {
    const key = `${segment} ${interval_s}`;
    let plan = this.made.get(key);
    if (plan === undefined) {
      plan = new SpectrumPlan({
        segment,
        window: this.report?.window ?? "hann",
        samplingRate_Hz: 1 / interval_s,
      });
      this.made.set(key, plan);
    }
    return plan;
  }
}
