/** A stretch of one channel on its grid. */
export interface GridBlock {
  /** Grid index of the first sample. */
  readonly first: number;
  /** Values; NaN where there is none. */
  readonly values: Float64Array;
  /** Marks (see marks.ts), one per value. */
  readonly marks: Uint8Array;
}

export type Emit = (block: GridBlock) => void;

/**
 * One stage at work on one channel. Blocks come in order of index without holes between them; what is
 * emitted is in order without holes too, and does not depend on how the input was cut into blocks.
 */
export interface Kernel {
  push(block: GridBlock, emit: Emit): void;
  /** The record has ended: emits what is still owed. */
  flush(emit: Emit): void;
}

/** Passes blocks on as they are. */
export const passOn = (): Kernel => ({ push: (block, emit) => emit(block), flush: () => {} });

/** Keeps the samples whose index is a multiple of `factor`; index k becomes k / factor. */
export function keepEvery(factor: number): Kernel {
  return {
    push(block, emit) {
      const first = Math.ceil(block.first / factor);
      const last = Math.floor((block.first + block.values.length - 1) / factor);
      const count = last - first + 1;
      if (count <= 0) return;
      const values = new Float64Array(count);
      const marks = new Uint8Array(count);
      for (let i = 0, from = first * factor - block.first; i < count; i++, from += factor) {
        values[i] = block.values[from]!;
        marks[i] = block.marks[from]!;
      }
      emit({ first, values, marks });
    },
    flush() {},
  };
}
