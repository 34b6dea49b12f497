import { firstIndexAtOrAfter, type Grid } from "../signal/grid.ts";
import type { Scope } from "./scope.ts";

/** Grid indices inside a scope: from … until - 1. */
export interface IndexRange {
  readonly from: number;
  readonly until: number;
}

export function indexRange(grid: Grid, scope: Scope): IndexRange {
  return {
    from: Number.isFinite(scope.from_us)
      ? firstIndexAtOrAfter(grid, scope.from_us)
      : Number.NEGATIVE_INFINITY,
    until: Number.isFinite(scope.until_us)
      ? firstIndexAtOrAfter(grid, scope.until_us)
      : Number.POSITIVE_INFINITY,
  };
}
