import type { GridBlock } from "../signal/grid-block.ts";
import { MISSING, STATES, stateOf } from "../signal/marks.ts";
import type { IndexRange } from "./index-range.ts";

/** How many samples of a node are in each state, and for how many each thing holds at all. */
export class StateCounts {
  samples = 0;
  readonly byState = new Float64Array(STATES.length);
  private readonly byMark = new Float64Array(2 * MISSING);
  private readonly range: IndexRange;

  constructor(range: IndexRange) {
    this.range = range;
  }

  push(block: GridBlock): void {
    const { from, until } = this.range;
    const { marks, first } = block;
    const start = Math.max(0, from - first);
    const end = Math.min(marks.length, until - first);
    for (let i = start; i < end; i++) this.byMark[marks[i]!]!++;
    if (end > start) this.samples += end - start;
  }

  /** State name → samples whose state it is; states in the order of the design. */
  states(): Record<(typeof STATES)[number], number> {
    return this.gather((mark, place) => stateOf(mark) === place);
  }

  /** State name → samples for which it holds, whatever else does. */
  holds(): Record<(typeof STATES)[number], number> {
    return this.gather((mark, place) => (place === 0 ? mark === 0 : (mark & (1 << (place - 1))) !== 0));
  }

  private gather(counts: (mark: number, place: number) => boolean): Record<(typeof STATES)[number], number> {
    const out = {} as Record<(typeof STATES)[number], number>;
    STATES.forEach((state, place) => {
      let n = 0;
      for (let mark = 0; mark < this.byMark.length; mark++)
        if (this.byMark[mark]! > 0 && counts(mark, place)) n += this.byMark[mark]!;
      out[state] = n;
    });
    return out;
  }
}
