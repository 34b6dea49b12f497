/**
 * Allan deviation and its family: how averages over a time tau differ from one to the next.
 * References: D. W. Allan (1966), Proceedings of the IEEE 54, 221-230; W. J. Riley (2008), Handbook of Frequency
 * Stability Analysis, NIST Special Publication 1065, 5.2 (the estimators). Recalled from memory.
 */
import { CompensatedSum } from "./compensated-sum.ts";

/** One record of evenly spaced readings, each the mean over its interval or a sample of what varies slowly. */
export class AllanFamily {
  private readonly readings: number;
  private readonly interval: number;
  /** Running sum of the readings about the first one, in intervals: readings + 1 places. */
  private readonly sums: Float64Array;

  /**
   * @param y         readings without gaps, all finite
   * @param interval  time from one reading to the next, > 0
   */
  constructor(y: Float64Array, interval: number) {
    if (!(interval > 0)) throw new RangeError(`interval ${interval} is not > 0`);
    this.readings = y.length;
    this.interval = interval;
    this.sums = new Float64Array(y.length + 1);
    const total = new CompensatedSum();
    // All members of the family are blind to a constant, so that the first reading may be taken out.
    for (let i = 0; i < y.length; i++) {
      total.add(y[i]! - y[0]!);
      this.sums[i + 1] = total.total;
    }
  }

  /** Averaging time of m intervals. */
  tau(m: number): number {
    return m * this.interval;
  }

  /** Allan deviation of adjacent, non-overlapping means of m readings; NaN with fewer than 2 m readings. */
  allan(m: number): number {
    return this.rootMean(m, 2, m, this.readings - 2 * m, 2);
  }

  /** Overlapping Allan deviation: means of m readings from every start. The usual estimator. */
  overlappingAllan(m: number): number {
    return this.rootMean(m, 2, 1, this.readings - 2 * m, 2);
  }

  /** Hadamard deviation of non-overlapping means: blind to a steady drift too; NaN with fewer than 3 m readings. */
  hadamard(m: number): number {
    return this.rootMean(m, 3, m, this.readings - 3 * m, 6);
  }

  /** Overlapping Hadamard deviation. */
  overlappingHadamard(m: number): number {
    return this.rootMean(m, 3, 1, this.readings - 3 * m, 6);
  }

  /** Modified Allan deviation: second differences averaged over m starts; NaN with fewer than 3 m - 1 readings. */
  modifiedAllan(m: number): number {
    this.check(m);
    const { sums } = this;
    const last = this.readings - 3 * m + 1;
    if (last < 0) return Number.NaN;
    const inner = new CompensatedSum();
    for (let i = 0; i < m; i++) inner.add(this.difference(i, m, 2));
    const squares = new CompensatedSum();
    for (let j = 0; ; j++) {
      squares.add(inner.total ** 2);
      if (j === last) break;
      // The third difference: what enters the sum of second differences less what leaves it.
      inner.add(sums[j + 3 * m]! - 3 * sums[j + 2 * m]! + 3 * sums[j + m]! - sums[j]!);
    }
    return Math.sqrt(squares.total / (last + 1) / 2) / (m * m);
  }

  /** Time deviation: tau / sqrt(3) times the modified Allan deviation, unit of the readings times time. */
  time(m: number): number {
    return (this.tau(m) * this.modifiedAllan(m)) / Math.sqrt(3);
  }

  /** Root of the mean square, over starts 0, step, … last, of the order-th difference of the sums, over m. */
  private rootMean(m: number, order: 2 | 3, step: number, last: number, divisor: number): number {
    this.check(m);
    if (last < 0) return Number.NaN;
    const squares = new CompensatedSum();
    let count = 0;
    for (let j = 0; j <= last; j += step, count++) squares.add(this.difference(j, m, order) ** 2);
    return Math.sqrt(squares.total / count / divisor) / m;
  }

  private difference(j: number, m: number, order: 2 | 3): number {
    const { sums } = this;
    return order === 2
      ? sums[j + 2 * m]! - 2 * sums[j + m]! + sums[j]!
      : sums[j + 3 * m]! - 3 * sums[j + 2 * m]! + 3 * sums[j + m]! - sums[j]!;
  }

  private check(m: number): void {
    if (!(Number.isInteger(m) && m >= 1))
      throw new RangeError(`averaging factor ${m} is not a whole number >= 1`);
  }
}

/** Averaging factors 1, 2, 4, … for which the overlapping deviation of n readings still has some ground: n / 4. */
export function octaveFactors(readings: number): number[] {
  const factors: number[] = [];
  for (let m = 1; 4 * m <= readings; m *= 2) factors.push(m);
  return factors;
}
