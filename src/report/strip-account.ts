import type { TimeStrip } from "../engine/time-strip.ts";
import { isoTime } from "../outputs/cell-text.ts";
import { type Grid, intervalSeconds, timeOf } from "../signal/grid.ts";
import { STATES } from "../signal/marks.ts";
import type { StripAccount } from "./account-format.ts";

/** Brings the envelopes before and after to the same columns of time: those of the coarser of the two. */
export function stripAccount(before: TimeStrip, grid: Grid, after: TimeStrip, outGrid: Grid): StripAccount {
  const width_s = (s: TimeStrip, g: Grid) => s.width * intervalSeconds(g);
  const column_s = Math.max(width_s(before, grid), width_s(after, outGrid));
  const start_us = Number.isNaN(before.first) ? 0 : timeOf(grid, before.first * before.width);
  const columns = Math.ceil((before.low.length * width_s(before, grid)) / column_s);
  const spread = (s: TimeStrip, g: Grid) => {
    const low: (number | null)[] = new Array(columns).fill(null);
    const high: (number | null)[] = new Array(columns).fill(null);
    const worst: (number | null)[] = new Array(columns).fill(null);
    for (let i = 0; i < s.low.length; i++) {
      const a = s.low[i];
      const b = s.high[i];
      if (a === undefined || b === undefined) continue;
      const t_us = timeOf(g, (s.first + i) * s.width);
      const at = Math.min(columns - 1, Math.max(0, Math.floor((t_us - start_us) / 1e6 / column_s)));
      worst[at] = Math.max(worst[at] ?? 0, s.worst[i] ?? 0);
      if (!Number.isFinite(a) || !Number.isFinite(b)) continue;
      low[at] = Math.min(low[at] ?? a, a);
      high[at] = Math.max(high[at] ?? b, b);
    }
    return { low, high, worst };
  };
  const x = spread(before, grid);
  const y = spread(after, outGrid);
  return {
    from: isoTime(start_us),
    column_s,
    in_low: x.low,
    in_high: x.high,
    out_low: y.low,
    out_high: y.high,
    out_state: y.worst.map((place) => (place === null ? null : STATES[place]!)),
  };
}
