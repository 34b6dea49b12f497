/**
 * An even grid of times, held exactly: an integer anchor and a rational step.
 *
 * Sample k of a grid stands at `anchor_us + (stride * k + offset) * halfNum / halfDen` microseconds.
 * The step is counted in halves of the resampling interval, because a centred window with an even number
 * of points lies half-way between samples, and because every later rate is a whole multiple of the first.
 * Integers stay below 2^53 for times to the year 2255, so index arithmetic is exact.
 */
export interface Grid {
  /** Integer microseconds since 1970-01-01T00:00:00Z. */
  readonly anchor_us: number;
  /** Half of the first interval of the chain, in microseconds, in lowest terms. */
  readonly halfNum: number;
  readonly halfDen: number;
  /** Half-steps from one sample to the next; even, at least 2. */
  readonly stride: number;
  /** Half-steps from the anchor to sample 0. */
  readonly offset: number;
}

/** Whether a grid of num / den microseconds can be held exactly: at least 1, in integers with num * den < 2^52. */
export function isGridInterval(num: number, den: number): boolean {
  return num >= den && den > 0 && Number.isInteger(num) && Number.isInteger(den) && num * den < 2 ** 52;
}

/**
 * @param num, den  the interval in microseconds, positive integers in lowest terms
 * @throws RangeError unless isGridInterval
 */
export function makeGrid(num: number, den: number, anchor_us = 0): Grid {
  if (!isGridInterval(num, den))
    throw new RangeError(`grid interval ${num}/${den} us is outside what can be held exactly`);
  const evenNum = num % 2 === 0;
  const halfNum = evenNum ? num / 2 : num;
  const halfDen = evenNum ? den : 2 * den;
  return { anchor_us, halfNum, halfDen, stride: 2, offset: 0 };
}

/** Keeps every `factor`-th sample: those whose index is a multiple of `factor`. */
export function coarserGrid(grid: Grid, factor: number): Grid {
  return { ...grid, stride: grid.stride * factor };
}

/** Every sample half an interval later. */
export function halfStepLater(grid: Grid): Grid {
  return { ...grid, offset: grid.offset + grid.stride / 2 };
}

export function intervalSeconds(grid: Grid): number {
  return (grid.stride * grid.halfNum) / grid.halfDen / 1e6;
}

/** Time of sample k, rounded half up to a whole microsecond (exact where the grid lies on microseconds). */
export function timeOf(grid: Grid, k: number): number {
  const m = grid.stride * k + grid.offset;
  const q = Math.floor(m / grid.halfDen);
  const r = m - q * grid.halfDen;
  return (
    grid.anchor_us + q * grid.halfNum + Math.floor((2 * r * grid.halfNum + grid.halfDen) / (2 * grid.halfDen))
  );
}

/** Time of sample k minus `t_us`, in microseconds, without rounding the sample's time first. */
export function timeSince(grid: Grid, k: number, t_us: number): number {
  const m = grid.stride * k + grid.offset;
  const q = Math.floor(m / grid.halfDen);
  const r = m - q * grid.halfDen;
  return grid.anchor_us + q * grid.halfNum - t_us + (r * grid.halfNum) / grid.halfDen;
}

/** Largest k whose exact time is not after `t_us`. */
export function lastIndexAtOrBefore(grid: Grid, t_us: number): number {
  const t = t_us - grid.anchor_us;
  const q = Math.floor(t / grid.halfNum);
  const r = t - q * grid.halfNum;
  const m = q * grid.halfDen + Math.floor((r * grid.halfDen) / grid.halfNum);
  return Math.floor((m - grid.offset) / grid.stride);
}

/** Smallest k whose exact time is not before `t_us`. */
export function firstIndexAtOrAfter(grid: Grid, t_us: number): number {
  const k = lastIndexAtOrBefore(grid, t_us);
  return timeSince(grid, k, t_us) >= 0 ? k : k + 1;
}

/** True where every sample of the grid falls on whole multiples of `us` microseconds. */
export function fallsOnMultiplesOf(grid: Grid, us: number): boolean {
  const whole = (m: number) => (m * grid.halfNum) % (grid.halfDen * us) === 0;
  return grid.anchor_us % us === 0 && whole(grid.offset) && whole(grid.stride);
}
