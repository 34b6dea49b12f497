import type { GridBlock } from "../signal/grid-block.ts";
import { SampleBuffer } from "../signal/sample-buffer.ts";
import type { SpectrumPlan } from "../signal/welch.ts";
import type { IndexRange } from "./index-range.ts";

/** One segment's transform, or null where the segment has an absent sample or lies outside the scope. */
export type SegmentListener = (segment: number, spectrum: SegmentSpectrum | null) => void;

export interface SegmentSpectrum {
  readonly re: Float64Array;
  readonly im: Float64Array;
  /** Mean square of the segment, taken in time. */
  readonly meanSquare: number;
}

/**
 * Cuts one node of a channel's chain into half-overlapping segments anchored to the absolute sample index
 * and transforms each gap-free one once, for everybody who listens. Segment m starts at m * hop + shift,
 * where shift is the whole-sample delay of the chain so far, so that the same m means the same stretch of
 * the signal at every node of one rate.
 */
export class NodeSpectra {
  readonly plan: SpectrumPlan;
  private readonly shift: number;
  private readonly range: IndexRange;
  private readonly listeners: SegmentListener[] = [];
  private readonly buffer = new SampleBuffer();
  private next = Number.NaN;
  private lastAbsent = Number.NEGATIVE_INFINITY;

  constructor(plan: SpectrumPlan, shift: number, range: IndexRange) {
    this.plan = plan;
    this.shift = shift;
    this.range = range;
  }

  listen(listener: SegmentListener): void {
    this.listeners.push(listener);
  }

  push(block: GridBlock): void {
    const { values, first } = block;
    if (values.length === 0 || this.listeners.length === 0) return;
    const { hop, segment } = this.plan;
    if (Number.isNaN(this.next)) this.next = Math.ceil((first - this.shift) / hop);
    // Segments are served as the samples come, so that one absent sample is remembered only as its index.
    let done = 0;
    for (;;) {
      const end = this.next * hop + this.shift + segment;
      const need = Math.min(values.length, end - first);
      for (let i = done; i < need; i++) if (Number.isNaN(values[i]!)) this.lastAbsent = first + i;
      if (need > done)
        this.buffer.append({
          first: first + done,
          values: values.subarray(done, need),
          marks: block.marks.subarray(done, need),
        });
      done = Math.max(done, need);
      if (first + done < end) return;
      this.serve(end - segment);
      this.next++;
      this.buffer.dropBefore(this.next * hop + this.shift);
    }
  }

  private serve(start: number): void {
    const { segment, bins } = this.plan;
    const end = start + segment;
    if (
      start < this.buffer.base ||
      this.lastAbsent >= start ||
      start < this.range.from ||
      end > this.range.until
    ) {
      for (const listen of this.listeners) listen(this.next, null);
      return;
    }
    const at = start - this.buffer.base;
    const re = new Float64Array(bins);
    const im = new Float64Array(bins);
    const meanSquare = this.plan.spectrum(this.buffer.values.subarray(at, at + segment), re, im);
    for (const listen of this.listeners) listen(this.next, { re, im, meanSquare });
  }
}
