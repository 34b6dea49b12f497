const COLUMNS = 256;

/** One stretch of time and what was removed in it. */
export interface RemovalColumn {
  /** Grid index of the column's first sample. */
  readonly first: number;
  readonly samples: number;
  /** Sum of the removed values squared. */
  readonly square: number;
  readonly low: number;
  readonly high: number;
  /** Largest removed value by size, with its sign, and its grid index. */
  readonly largest: number;
  readonly largestAt: number;
}

/**
 * When it was removed: power and largest value of the removed series per column of time, in bounded memory.
 * Columns are 2^n samples wide, anchored to the absolute index, and double when there would be more than 256.
 */
export class RemovalStrip {
  width = 1;
  private columns: RemovalColumn[] = [];
  private readonly open = { first: 0, samples: 0, square: 0, low: 0, high: 0, largest: 0, largestAt: 0 };

  add(index: number, removed: number): void {
    const { open } = this;
    if (index >= open.first + this.width || open.samples === 0) this.start(index);
    open.samples++;
    open.square += removed * removed;
    if (open.samples === 1 || removed < open.low) open.low = removed;
    if (open.samples === 1 || removed > open.high) open.high = removed;
    if (Math.abs(removed) > Math.abs(open.largest) || open.samples === 1) {
      open.largest = removed;
      open.largestAt = index;
    }
  }

  list(): readonly RemovalColumn[] {
    return this.open.samples === 0 ? this.columns : [...this.columns, { ...this.open }];
  }

  /** Closes the open column and opens the one that holds `index`. */
  private start(index: number): void {
    if (this.open.samples > 0) this.columns.push({ ...this.open });
    const start = this.columns[0]?.first ?? index;
    while ((index - start) / this.width >= COLUMNS) this.widen();
    const first = Math.floor(index / this.width) * this.width;
    const last = this.columns.at(-1);
    // After widening, the column just closed may be the one that goes on.
    if (last !== undefined && last.first === first) Object.assign(this.open, this.columns.pop());
    else
      Object.assign(this.open, {
        first,
        samples: 0,
        square: 0,
        low: 0,
        high: 0,
        largest: 0,
        largestAt: index,
      });
  }

  private widen(): void {
    this.width *= 2;
    const wider: RemovalColumn[] = [];
    for (const column of this.columns) {
      const first = Math.floor(column.first / this.width) * this.width;
      const last = wider.at(-1);
      if (last === undefined || last.first !== first) {
        wider.push({ ...column, first });
        continue;
      }
      const bigger = Math.abs(column.largest) > Math.abs(last.largest);
      wider[wider.length - 1] = {
        first,
        samples: last.samples + column.samples,
        square: last.square + column.square,
        low: Math.min(last.low, column.low),
        high: Math.max(last.high, column.high),
        largest: bigger ? column.largest : last.largest,
        largestAt: bigger ? column.largestAt : last.largestAt,
      };
    }
    this.columns = wider;
  }
}
