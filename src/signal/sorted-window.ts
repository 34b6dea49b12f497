/**
 * The values of a sliding window in order: adding, removing and reading by rank take about the logarithm of
 * their number, with moves inside chunks of a few kilobytes. Serves running medians and median absolute
 * deviations exactly.
 */

const CHUNK = 512;

export class SortedWindow {
  /** Chunks in rising order, each rising and none empty (but the only one may be). */
  private readonly chunks: Float64Array[] = [new Float64Array(CHUNK)];
  private readonly counts: number[] = [0];
  /** Rank of each chunk's first value. */
  private readonly starts: number[] = [0];
  private total = 0;

  /** Values held. */
  get size(): number {
    return this.total;
  }

  /** Adds a value, not NaN. */
  add(value: number): void {
    // So that a negative zero and a zero are one value.
    const v = value + 0;
    const c = this.chunkFor(v);
    const chunk = this.chunks[c]!;
    const count = this.counts[c]!;
    const at = firstNotBelow(chunk, count, v);
    chunk.copyWithin(at + 1, at, count);
    chunk[at] = v;
    this.counts[c] = count + 1;
    this.total++;
    for (let i = c + 1; i < this.starts.length; i++) this.starts[i]!++;
    if (count + 1 === CHUNK) this.split(c);
  }

  /**
   * Takes away one value equal to this one.
   * @throws RangeError when there is none
   */
  remove(value: number): void {
    const v = value + 0;
    const c = this.chunkFor(v);
    const chunk = this.chunks[c]!;
    const count = this.counts[c]!;
    const at = firstNotBelow(chunk, count, v);
    if (at >= count || chunk[at] !== v) throw new RangeError(`${value} is not in the window`);
    chunk.copyWithin(at, at + 1, count);
    this.counts[c] = count - 1;
    this.total--;
    for (let i = c + 1; i < this.starts.length; i++) this.starts[i]!--;
    if (count === 1 && this.chunks.length > 1) {
      this.chunks.splice(c, 1);
      this.counts.splice(c, 1);
      this.starts.splice(c, 1);
    }
  }

  /** Value of a rank, 0 for the smallest; 0 <= rank < size. */
  at(rank: number): number {
    let low = 0;
    let high = this.starts.length - 1;
    while (low < high) {
      const middle = (low + high + 1) >>> 1;
      if (this.starts[middle]! <= rank) low = middle;
      else high = middle - 1;
    }
    return this.chunks[low]![rank - this.starts[low]!]!;
  }

  /** Middle value, or the mean of the two middle ones; NaN when empty. */
  median(): number {
    const n = this.total;
    if (n === 0) return Number.NaN;
    const half = n >>> 1;
    return n % 2 === 1 ? this.at(half) : (this.at(half - 1) + this.at(half)) / 2;
  }

  /** Median of the distances from the median; NaN when empty. */
  medianAbsoluteDeviation(): number {
    const n = this.total;
    if (n === 0) return Number.NaN;
    const centre = this.median();
    const half = n >>> 1;
    const upper = this.distance(half, centre);
    return n % 2 === 1 ? upper : (this.distance(half - 1, centre) + upper) / 2;
  }

  /**
   * The k-th smallest distance from the median. Distances rise on either side of the middle rank, so it is a
   * matter of how many of the k + 1 smallest lie below the middle: found by halving.
   */
  private distance(k: number, centre: number): number {
    const below = this.total >>> 1;
    const above = this.total - below;
    const left = (i: number) => centre - this.at(below - 1 - i);
    const right = (j: number) => this.at(below + j) - centre;
    let low = Math.max(0, k + 1 - above);
    let high = Math.min(below, k + 1);
    while (low < high) {
      const i = (low + high) >>> 1;
      // Of i from the left and k + 1 - i from the right: too few from the left if the next one there is smaller.
      if (left(i) < right(k - i)) low = i + 1;
      else high = i;
    }
    const fromLeft = low > 0 ? left(low - 1) : Number.NEGATIVE_INFINITY;
    const fromRight = low < k + 1 ? right(k - low) : Number.NEGATIVE_INFINITY;
    return Math.max(fromLeft, fromRight);
  }

  /** First chunk whose last value is not below v; the last chunk when there is none. */
  private chunkFor(v: number): number {
    let low = 0;
    let high = this.chunks.length - 1;
    while (low < high) {
      const middle = (low + high) >>> 1;
      if (this.chunks[middle]![this.counts[middle]! - 1]! < v) low = middle + 1;
      else high = middle;
    }
    return low;
  }

  private split(c: number): void {
    const whole = this.chunks[c]!;
    const half = CHUNK / 2;
    const upper = new Float64Array(CHUNK);
    upper.set(whole.subarray(half));
    this.counts[c] = half;
    this.chunks.splice(c + 1, 0, upper);
    this.counts.splice(c + 1, 0, CHUNK - half);
    this.starts.splice(c + 1, 0, this.starts[c]! + half);
  }
}

function firstNotBelow(sorted: Float64Array, count: number, v: number): number {
  let low = 0;
  let high = count;
  while (low < high) {
    const middle = (low + high) >>> 1;
    if (sorted[middle]! < v) low = middle + 1;
    else high = middle;
  }
  return low;
}
