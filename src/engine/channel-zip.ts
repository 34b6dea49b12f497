import type { Emit } from "../signal/grid-block.ts";
import { SampleBuffer } from "../signal/sample-buffer.ts";
import type { IndexRange } from "./index-range.ts";

export type RowsOut = (
  first: number,
  count: number,
  values: readonly Float64Array[],
  marks: readonly Uint8Array[],
) => void;

/** Rows written at a time; only memory depends on it. */
const ROWS = 8192;

/** Brings the channels of one grid together again: hands on rows that all channels have reached. */
export class ChannelZip {
  private readonly buffers: SampleBuffer[];
  private readonly range: IndexRange;
  private readonly out: RowsOut;

  constructor(channels: number, range: IndexRange, out: RowsOut) {
    this.buffers = Array.from({ length: channels }, () => new SampleBuffer());
    this.range = range;
    this.out = out;
  }

  sink(channel: number): Emit {
    const buffer = this.buffers[channel]!;
    return (block) => {
      buffer.append(block);
      if (buffer.length >= ROWS) this.handOver();
    };
  }

  /** Hands over all rows that every channel has reached. */
  handOver(): void {
    const { buffers, range } = this;
    if (buffers.some((b) => !b.started)) return;
    const first = Math.max(...buffers.map((b) => b.base));
    const end = Math.min(...buffers.map((b) => b.end));
    const from = Math.max(first, range.from);
    const until = Math.min(end, range.until);
    for (let k = from; k < until; k += ROWS) {
      const count = Math.min(ROWS, until - k);
      const part = <T extends Float64Array | Uint8Array>(array: T, base: number): T =>
        array.subarray(k - base, k - base + count) as T;
      this.out(
        k,
        count,
        buffers.map((b) => part(b.values, b.base)),
        buffers.map((b) => part(b.marks, b.base)),
      );
    }
    for (const b of buffers) b.dropBefore(end);
  }
}
