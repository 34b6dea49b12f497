import type { RowBlock } from "../logs/rows.ts";

/** What the rows' own times say about the logger's clock. */
export interface Timing {
  readonly rows: number;
  readonly first_us: number;
  readonly last_us: number;
  /** Median of the steps between rows, microseconds (lower median). */
  readonly nominal_us: number;
  /** Least-squares interval over steps counted in nominal intervals; null with fewer than 3 rows. */
  readonly fitted_us: number | null;
  /** Standard deviation of the row times about that line. */
  readonly jitterSd_us: number | null;
  readonly gapCount: number;
  readonly gapTotal_us: number;
  /** The longest, at most 50, in order of time. */
  readonly gaps: readonly { readonly from_us: number; readonly to_us: number }[];
  readonly longestStep_us: number;
}

/** A step longer than this many nominal intervals is a gap. */
export const GAP_INTERVALS = 1.5;
const GAPS_LISTED = 50;
const BUCKETS = 65_536;

/**
 * Measures the clock of a record that can be read again and again.
 * @param blocks  starts a new reading of the rows
 * @returns null when there are fewer than 2 rows
 */
export function measureTiming(blocks: () => Iterable<RowBlock>): Timing | null {
  let rows = 0;
  let first_us = 0;
  let last_us = 0;
  let longest = 0;
  for (const step of steps(blocks, (t) => {
    if (rows === 0) first_us = t;
    last_us = t;
    rows++;
  }))
    if (step > longest) longest = step;
  if (rows < 2) return null;
  const nominal_us = medianStep(blocks, rows - 1, longest);
  // Stamps rounded to whole milliseconds make the median step a rounded one; their mean is not.
  let short = 0;
  let shortSum = 0;
  for (const step of steps(blocks))
    if (step <= GAP_INTERVALS * nominal_us) {
      short++;
      shortSum += step;
    }
  const pace_us = shortSum / short;
  const gaps: { from_us: number; to_us: number }[] = [];
  let gapCount = 0;
  let gapTotal_us = 0;
  // Times are fitted as their departure from the mean pace, so that long records cost no digits.
  let n = 0;
  let count = 0;
  let meanN = 0;
  let meanD = 0;
  let cnn = 0;
  let cnd = 0;
  let cdd = 0;
  let previous = Number.NaN;
  for (const block of blocks())
    for (let i = 0; i < block.count; i++) {
      const t = block.times[i]!;
      if (!Number.isNaN(previous)) {
        const step = t - previous;
        n += Math.max(1, Math.round(step / pace_us));
        if (step > GAP_INTERVALS * nominal_us) {
          gapCount++;
          gapTotal_us += step;
          keepLongest(gaps, { from_us: previous, to_us: t });
        }
      }
      previous = t;
      const d = t - first_us - n * pace_us;
      count++;
      const dn = n - meanN;
      const dd = d - meanD;
      meanN += dn / count;
      meanD += dd / count;
      cnn += dn * (n - meanN);
      cnd += dn * (d - meanD);
      cdd += dd * (d - meanD);
    }
  const slope = count > 2 && cnn > 0 ? cnd / cnn : null;
  return {
    rows,
    first_us,
    last_us,
    nominal_us,
    fitted_us: slope === null ? null : pace_us + slope,
    jitterSd_us: slope === null ? null : Math.sqrt(Math.max(0, cdd - slope * cnd) / (count - 2)),
    gapCount,
    gapTotal_us,
    gaps: gaps.sort((a, b) => a.from_us - b.from_us),
    longestStep_us: longest,
  };
}

function* steps(blocks: () => Iterable<RowBlock>, each?: (t: number) => void): Generator<number> {
  let previous = Number.NaN;
  for (const block of blocks())
    for (let i = 0; i < block.count; i++) {
      const t = block.times[i]!;
      each?.(t);
      if (!Number.isNaN(previous)) yield t - previous;
      previous = t;
    }
}

/** Exact lower median of whole-number steps, by narrowing a histogram: memory does not grow. */
function medianStep(blocks: () => Iterable<RowBlock>, count: number, longest: number): number {
  const rank = Math.floor((count - 1) / 2);
  let low = 0;
  let width = Math.ceil((longest + 1) / BUCKETS);
  let below = 0;
  for (;;) {
    const histogram = new Float64Array(BUCKETS);
    for (const step of steps(blocks)) {
      const bucket = Math.floor((step - low) / width);
      if (bucket >= 0 && bucket < BUCKETS) histogram[bucket]!++;
    }
    let bucket = 0;
    while (below + histogram[bucket]! <= rank) below += histogram[bucket++]!;
    low += bucket * width;
    if (width === 1) return low;
    width = Math.ceil(width / BUCKETS);
  }
}

function keepLongest(
  gaps: { from_us: number; to_us: number }[],
  gap: { from_us: number; to_us: number },
): void {
  gaps.push(gap);
  if (gaps.length <= GAPS_LISTED) return;
  let shortest = 0;
  for (let i = 1; i < gaps.length; i++) if (length(gaps[i]!) < length(gaps[shortest]!)) shortest = i;
  gaps.splice(shortest, 1);
}

const length = (gap: { from_us: number; to_us: number }) => gap.to_us - gap.from_us;
