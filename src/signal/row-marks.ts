/**
 * Carries the marks of rows to the grid samples made of them, whatever method of interpolation made the samples.
 *
 * A rejected row is absent to the interpolation. A blank grid time is SCREENED, not MISSING, where it would have
 * a value had its rejected rows been kept; SUSPECT rows make suspect every sample that rests on them. Samples
 * are handed on as soon as that is known: a blank one at the next row that was written, or once the gap is
 * longer than any that is joined. Memory holds the rows and samples of about two longest gaps.
 */
import { fallsOnMultiplesOf, type Grid, intervalSeconds, timeOf } from "./grid.ts";
import type { Emit, GridBlock } from "./grid-block.ts";
import { MISSING, SCREENED, SUSPECT } from "./marks.ts";
import { SampleBuffer } from "./sample-buffer.ts";

/** Which rows a grid sample rests on. */
export interface RestsOn {
  readonly longestGap_us: number;
  /** The nearer of two rows alone, up to half an interval away whatever gap lies beyond. */
  readonly nearest: boolean;
  /** Rows beyond the two around it, on either side. */
  readonly beyond: number;
  /** The rows within half an interval, beside those around. */
  readonly cell: boolean;
}

export class RowMarks {
  private readonly grid: Grid;
  private readonly rule: RestsOn;
  private readonly half_us: number;
  private readonly slack_us: number;
  private readonly near_us: number;
  private readonly held = new SampleBuffer();
  /** Rows with a value, rejected ones among them. */
  private times = new Float64Array(256);
  private marks = new Uint8Array(256);
  private rows = 0;
  private lastRow_us = Number.NEGATIVE_INFINITY;
  /** Last row at or before the sample looked at. */
  private at = -1;

  constructor(grid: Grid, rule: RestsOn) {
    this.grid = grid;
    this.rule = rule;
    this.half_us = intervalSeconds(grid) * 5e5;
    this.slack_us = fallsOnMultiplesOf(grid, 1) ? 0 : 0.5;
    this.near_us = rule.nearest ? Math.max(this.slack_us, this.half_us) : this.slack_us;
  }

  /** Rows that the interpolation is about to see; NaN without SCREENED is no row at all. */
  see(times: Float64Array, column: Float64Array, marks: Uint8Array, count: number): void {
    for (let i = 0; i < count; i++) {
      if (Number.isNaN(column[i]!) && (marks[i]! & SCREENED) === 0) continue;
      if (this.rows === this.times.length) this.grow();
      this.times[this.rows] = times[i]!;
      this.marks[this.rows] = marks[i]!;
      this.rows++;
    }
    if (count > 0) this.lastRow_us = times[count - 1]!;
  }

  /** Samples as the interpolation made them. */
  take(block: GridBlock): void {
    this.held.append(block);
  }

  /** Hands on what is known; all of it at the end. */
  handOn(ended: boolean, emit: Emit): void {
    const { held } = this;
    let n = 0;
    for (; n < held.length; n++) {
      const g = timeOf(this.grid, held.base + n);
      while (this.at + 1 < this.rows && this.times[this.at + 1]! <= g + this.slack_us) this.at++;
      if ((held.marks[n]! & MISSING) === 0) held.marks[n]! |= this.suspect(g);
      else {
        const screened = this.screened(g, ended);
        if (screened === null) break;
        if (screened) held.marks[n] = (held.marks[n]! & ~MISSING) | SCREENED;
      }
    }
    if (n === 0) return;
    emit({ first: held.base, values: held.values.slice(0, n), marks: held.marks.slice(0, n) });
    held.dropBefore(held.base + n);
    this.forget();
  }

  /** Whether a blank time would have a value if nothing had been rejected; null while that is not known. */
  private screened(g: number, ended: boolean): boolean | null {
    const { at, rows, times, marks, near_us } = this;
    const { longestGap_us } = this.rule;
    const rejected = (k: number) => (marks[k]! & SCREENED) !== 0;
    const before = at < 0 ? Number.NEGATIVE_INFINITY : times[at]!;
    if (at >= 0 && rejected(at) && g - before <= near_us) return true;
    if (at + 1 === rows) {
      const open = !ended && !(this.lastRow_us - before > longestGap_us && g < this.lastRow_us - near_us);
      return open ? null : false;
    }
    const after = times[at + 1]!;
    if (rejected(at + 1) && after - g <= near_us) return true;
    return at >= 0 && after - before <= longestGap_us && (rejected(at) || rejected(at + 1));
  }

  /** SUSPECT where a row is that the sample rests on. */
  private suspect(g: number): number {
    const { times, slack_us } = this;
    const { longestGap_us, nearest, beyond, cell } = this.rule;
    const left = this.present(this.at, -1);
    const right = this.present(this.at + 1, 1);
    const tl = left < 0 ? Number.NEGATIVE_INFINITY : times[left]!;
    const tr = right < 0 ? Number.POSITIVE_INFINITY : times[right]!;
    const since = g - tl;
    const away = tr - g;
    if (nearest) {
      const late = tr - tl <= longestGap_us ? since > away : since > this.near_us;
      return this.suspectAt(late ? right : left);
    }
    if (!cell) {
      if (Math.abs(since) <= slack_us) return this.suspectAt(left);
      if (Math.abs(away) <= slack_us) return this.suspectAt(right);
    }
    let mark = 0;
    for (const [start, way] of [
      [left, -1],
      [right, 1],
    ] as const) {
      let k = start;
      for (let n = 0; k >= 0; n++) {
        mark |= this.suspectAt(k);
        const inCell = cell && Math.abs(times[k]! - g) < this.half_us;
        const next = n < beyond || inCell ? this.present(k + way, way) : -1;
        if (next < 0 || Math.abs(times[next]! - times[k]!) > longestGap_us) break;
        k = next;
      }
    }
    return mark;
  }

  private suspectAt(row: number): number {
    return row < 0 ? 0 : this.marks[row]! & SUSPECT;
  }

  /** The first row from here on, in one direction, that was not rejected; -1 when there is none. */
  private present(row: number, way: 1 | -1): number {
    for (let k = row; k >= 0 && k < this.rows; k += way) if ((this.marks[k]! & SCREENED) === 0) return k;
    return -1;
  }

  /** Drops rows that no later sample rests on. */
  private forget(): void {
    if (this.at < this.rows / 2 || this.at < 0) return;
    const g = this.times[this.at]!;
    let keep = this.at;
    for (let present = 0; keep > 0; keep--) {
      if ((this.marks[keep]! & SCREENED) === 0) present++;
      const far = g - this.times[keep]! > this.half_us * 2;
      if ((present > this.rule.beyond + 1 && far) || g - this.times[keep]! > this.reach_us) break;
    }
    if (keep < this.rows / 4) return;
    this.times.copyWithin(0, keep, this.rows);
    this.marks.copyWithin(0, keep, this.rows);
    this.rows -= keep;
    this.at -= keep;
  }

  /** Rows farther back than this are not joined to anything to come. */
  private get reach_us(): number {
    return (this.rule.beyond + 2) * this.rule.longestGap_us + 4 * this.half_us;
  }

  private grow(): void {
    const times = new Float64Array(2 * this.times.length);
    const marks = new Uint8Array(2 * this.marks.length);
    times.set(this.times);
    marks.set(this.marks);
    this.times = times;
    this.marks = marks;
  }
}
