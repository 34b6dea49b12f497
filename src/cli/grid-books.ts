/** Proves from the written files that kept + removed gives the resampled input back. */
import { join } from "node:path";
import { removedLag } from "../engine/run-chain.ts";
import { storedText } from "../outputs/stored-files.ts";
import type { Plan } from "../pipeline/plan-types.ts";
import { intervalSeconds } from "../signal/grid.ts";
import { cleanSeries, type SeriesTask } from "./clean-series.ts";

export interface GridBooks {
  readonly compared: number;
  /** First time at which they do not add up, in words; null when they all do. */
  readonly misfit: string | null;
}

/**
 * @param task    the run as it was made again, with its outputs in task.folder
 * @param place   a folder for the resampled input
 * @returns null where the files cannot be compared: no removed series, or stages that change the signal after
 *          samples were dropped
 */
export async function gridBooks(task: SeriesTask, place: string): Promise<GridBooks | null> {
  const { plan, loaded, name } = task;
  if (!loaded.pipeline.writes.removed) return null;
  const drop = plan.stages.findIndex((s) => s.design.keepEvery > 1);
  const after = drop < 0 ? [] : plan.stages.slice(drop + 1);
  if (after.some((s) => s.design.taps !== null || s.design.learn !== undefined || s.design.keepEvery > 1))
    return null;
  const bare: Plan = { ...plan, stages: [], report: null, outGrid: plan.gridStage.design.grid };
  const writes = { ...loaded.pipeline.writes, removed: false, page: false };
  const quiet = { ...loaded, pipeline: { ...loaded.pipeline, requirements: {}, writes } };
  await cleanSeries({ ...task, plan: bare, loaded: quiet, folder: place });
  const input = series(join(place, `${name}.clean.csv`));
  const removed = series(join(task.folder, `${name}.removed.csv`));
  const clean = series(join(task.folder, `${name}.clean.csv`));
  const flags = loaded.pipeline.writes.flags ? 2 : 1;
  const digits = loaded.pipeline.writes.digits ?? 16;
  const interval_us = intervalSeconds(plan.gridStage.design.grid) * 1e6;
  let compared = 0;
  for (const [c, channel] of plan.channels.entries()) {
    const late_us = (removedLag(plan, c) ?? 0) * interval_us;
    const column = 1 + c * flags;
    for (const [time, row] of clean) {
      const y = row[column]!;
      const key = time - Math.round(late_us);
      const r = removed.get(key)?.[column];
      const x = input.get(key)?.[column];
      if (y === "" || r === undefined || x === undefined || r === "" || x === "") continue;
      compared++;
      // Each of the three was rounded to the digits asked for.
      const size = Math.max(Math.abs(Number(x)), Math.abs(Number(y)), Math.abs(Number(r)));
      if (!(Math.abs(Number(y) + Number(r) - Number(x)) <= 2 * size * 10 ** (1 - digits)))
        return { compared, misfit: `${channel.name} at ${row[0]}: ${y} + ${r} is not ${x}` };
    }
  }
  return { compared, misfit: null };
}

/** Rows of a written series by their time in microseconds. */
function series(path: string): Map<number, string[]> {
  const rows = new Map<number, string[]>();
  for (const line of (storedText(path) ?? "").split("\n").slice(1)) {
    const cells = line.split(",");
    if (cells.length > 1) rows.set(microseconds(cells[0]!), cells);
  }
  return rows;
}

/** Times as this tool writes them: to the second, the millisecond or the microsecond, with Z. */
function microseconds(time: string): number {
  const [whole, fraction = "Z"] = time.split(".") as [string, string?];
  return Date.parse(`${whole.replace("Z", "")}Z`) * 1000 + Number(fraction.replace("Z", "").padEnd(6, "0"));
}
