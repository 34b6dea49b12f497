import type { GridBlock } from "./grid-block.ts";

/** Consecutive samples of a channel, added at the end and dropped from the front; grows as needed. */
export class SampleBuffer {
  values = new Float64Array(1024);
  marks = new Uint8Array(1024);
  /** Grid index of values[0]; meaningful once something was added. */
  base = 0;
  length = 0;
  started = false;

  /** Grid index after the last sample. */
  get end(): number {
    return this.base + this.length;
  }

  append(block: GridBlock): void {
    const count = block.values.length;
    if (count === 0) return;
    if (!this.started) {
      this.base = block.first;
      this.started = true;
    } else if (block.first !== this.end) {
      throw new Error(`block starts at ${block.first}, expected ${this.end}`);
    }
    if (this.length + count > this.values.length) this.grow(this.length + count);
    this.values.set(block.values, this.length);
    this.marks.set(block.marks, this.length);
    this.length += count;
  }

  /** Forgets the samples before grid index k. */
  dropBefore(k: number): void {
    const n = Math.min(this.length, k - this.base);
    if (n <= 0) return;
    this.values.copyWithin(0, n, this.length);
    this.marks.copyWithin(0, n, this.length);
    this.base += n;
    this.length -= n;
  }

  private grow(least: number): void {
    const size = Math.max(least, 2 * this.values.length);
    const values = new Float64Array(size);
    const marks = new Uint8Array(size);
    values.set(this.values.subarray(0, this.length));
    marks.set(this.marks.subarray(0, this.length));
    this.values = values;
    this.marks = marks;
  }
}
