import type { GridBlock } from "../signal/grid-block.ts";
import { SampleBuffer } from "../signal/sample-buffer.ts";
import type { IndexRange } from "./index-range.ts";
import { RemovalStrip } from "./removal-strip.ts";
import { Extremes, PairSums } from "./sums.ts";
import { TimeStrip } from "./time-strip.ts";

/** Columns of a stage's picture: enough for the eye, and the account stays small. */
const STRIP_COLUMNS = 256;

/**
 * Compares one channel before and after a stage, sample by sample on the stage's input grid: output sample
 * k stands for input sample k - delay. Handed on to `removed`, where given: index of the input, x and x - y.
 */
export class Comparison {
  readonly sums = new PairSums();
  /** When it was removed, on the input's grid. */
  readonly removal = new RemovalStrip();
  readonly beforeStrip: TimeStrip;
  readonly afterStrip: TimeStrip;
  readonly before = new Extremes();
  readonly after = new Extremes();
  private readonly delay: number | null;
  private readonly range: IndexRange;
  private readonly waiting = new SampleBuffer();
  /** Outputs that stand for inputs still to come: only taps that look ahead make them. */
  private readonly early = new SampleBuffer();

  /** @param delay  whole samples; null when the delay is not whole, then only extremes are taken */
  constructor(delay: number | null, range: IndexRange) {
    this.delay = delay;
    this.range = range;
    this.beforeStrip = new TimeStrip(range, STRIP_COLUMNS);
    this.afterStrip = new TimeStrip(range, STRIP_COLUMNS);
  }

  pushBefore(block: GridBlock): void {
    if (this.delay !== null) this.waiting.append(block);
    this.before.addBlock(block, this.range);
    this.beforeStrip.push(block);
    if (this.early.length > 0) this.settleEarly();
  }

  pushAfter(block: GridBlock): void {
    this.after.addBlock(block, this.range);
    this.afterStrip.push(block);
    const { delay } = this;
    if (delay === null) return;
    if (delay >= 0) this.compare(block.values, block.first, block.values.length, delay);
    else {
      this.early.append(block);
      this.settleEarly();
    }
  }

  private settleEarly(): void {
    const { early, waiting, delay } = this;
    const count = Math.min(early.end, waiting.end + delay!) - early.base;
    if (count <= 0) return;
    this.compare(early.values, early.base, count, delay!);
    early.dropBefore(early.base + count);
  }

  /** Outputs first … first + count - 1 against their inputs. */
  private compare(values: Float64Array, first: number, count: number, delay: number): void {
    const { from, until } = this.range;
    const { waiting } = this;
    for (let i = 0, k = first; i < count; i++, k++) {
      const y = values[i]!;
      if (Number.isNaN(y) || k < from || k >= until) continue;
      const at = k - delay - waiting.base;
      const x = at >= 0 && at < waiting.length ? waiting.values[at]! : Number.NaN;
      if (Number.isNaN(x)) continue;
      this.sums.add(k, x, y);
      this.removal.add(k - delay, x - y);
    }
    waiting.dropBefore(first + count - delay);
  }
}
