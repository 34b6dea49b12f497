import type { Emit, GridBlock } from "../signal/grid-block.ts";
import { MISSING } from "../signal/marks.ts";
import { SampleBuffer } from "../signal/sample-buffer.ts";

/**
 * What was removed of one channel, on the grid of the resampled input: input sample k minus the output
 * sample that stands for it, k + delay. Kept + removed = input, sample by sample.
 */
export class RemovedSeries {
  private readonly input = new SampleBuffer();
  private readonly delay: number;
  private readonly sink: Emit;

  /** @param delay  whole samples by which the output's index lags behind the input's */
  constructor(delay: number, sink: Emit) {
    this.delay = delay;
    this.sink = sink;
  }

  readonly pushInput: Emit = (block) => this.input.append(block);

  readonly pushOutput: Emit = (block) => {
    const { input, delay } = this;
    const skip = Math.max(0, input.base - (block.first - delay));
    const first = block.first - delay + skip;
    const count = Math.min(block.values.length - skip, input.end - first);
    if (count <= 0) return;
    const values = new Float64Array(count);
    const marks = new Uint8Array(count);
    for (let i = 0; i < count; i++) {
      const x = input.values[first - input.base + i]!;
      values[i] = x - block.values[skip + i]!;
      marks[i] = block.marks[skip + i]! | (Number.isNaN(x) ? MISSING : 0);
    }
    const out: GridBlock = { first, values, marks };
    input.dropBefore(first + count);
    this.sink(out);
  };
}
