/**
 * Rejects a value that lies farther from the last value kept than the steepest change allows for the time
 * between them. After a true step the allowance grows until the new values fit it. The first value of all has
 * no predecessor: it is taken once the next row agrees with it, and rejected in favour of that row when it does
 * not; an empty next row says nothing against it.
 */
import { type Reject, type RowTest, rounding } from "./row-test.ts";

export class SteepestChange implements RowTest {
  private readonly perMicrosecond: number;
  private readonly reject: Reject;
  private kept = false;
  private row = -1;
  private t = Number.NaN;
  private value = Number.NaN;

  /** @param perMicrosecond  > 0, in the unit of the values */
  constructor(perMicrosecond: number, reject: Reject) {
    this.perMicrosecond = perMicrosecond;
    this.reject = reject;
  }

  push(row: number, t: number, value: number): number {
    const none = Number.isNaN(this.value);
    if (Number.isNaN(value)) {
      if (!none) this.kept = true;
      return row + 1;
    }
    const fits =
      none ||
      Math.abs(value - this.value) <=
        this.perMicrosecond * (t - this.t) * (1 + 1e-9) + rounding(value, this.value);
    if (this.kept && !fits) {
      this.reject(row);
      return row + 1;
    }
    if (!none && !this.kept) {
      if (fits) this.kept = true;
      else this.reject(this.row);
    }
    this.row = row;
    this.t = t;
    this.value = value;
    return this.kept ? row + 1 : row;
  }

  flush(): void {}
}
