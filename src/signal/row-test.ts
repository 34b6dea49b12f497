/** One test of one channel's rows, row by row in order of time. */
export interface RowTest {
  /**
   * @param row    number of the row, rising by 1
   * @param t      microseconds, strictly rising
   * @param value  NaN: absent
   * @returns  every row with a lower number is decided
   */
  push(row: number, t: number, value: number): number;
  /** No more rows come: what is undecided stays as it is, unless the test rejects it now. */
  flush(): void;
}

/** Called once for each row that a test rejects, before the row is decided. */
export type Reject = (row: number) => void;

/** What the rounding of two values as large as these can add to their difference. */
export function rounding(a: number, b: number): number {
  return 4 * Number.EPSILON * Math.max(Math.abs(a), Math.abs(b));
}
