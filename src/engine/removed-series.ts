import type { Emit } from "../signal/grid-block.ts";
import { MISSING } from "../signal/marks.ts";
import { SampleBuffer } from "../signal/sample-buffer.ts";

/**
 * What was removed of one channel, on the grid of the resampled input: input sample k minus the output
 * sample that stands for it, k + delay. Kept + removed = input, sample by sample.
 */
export class RemovedSeries {
  private readonly input = new SampleBuffer();
  private readonly output = new SampleBuffer();
  private readonly delay: number;
  private readonly sink: Emit;

  /** @param delay  whole samples by which the output's index lags behind the input's; negative when it runs ahead */
  constructor(delay: number, sink: Emit) {
    this.delay = delay;
    this.sink = sink;
  }

  readonly pushInput: Emit = (block) => {
    this.input.append(block);
    if (this.output.length > 0) this.settle();
  };

  readonly pushOutput: Emit = (block) => {
    this.output.append(block);
    this.settle();
  };

  private settle(): void {
    const { input, output, delay } = this;
    if (!input.started) return;
    output.dropBefore(input.base + delay);
    const first = output.base - delay;
    const count = Math.min(output.length, input.end - first);
    if (count <= 0) return;
    const values = new Float64Array(count);
    const marks = new Uint8Array(count);
    for (let i = 0; i < count; i++) {
      const x = input.values[first - input.base + i]!;
      values[i] = x - output.values[i]!;
      marks[i] = output.marks[i]! | (Number.isNaN(x) ? MISSING : 0);
    }
    input.dropBefore(first + count);
    output.dropBefore(output.base + count);
    this.sink({ first, values, marks });
  }
}
