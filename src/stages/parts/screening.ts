/** The tests of `screen` at work: rows wait until every test of every channel has decided on them. */
import type { MarkedRows } from "../../signal/marked-rows.ts";
import { SCREENED, SUSPECT } from "../../signal/marks.ts";
import { type Reject, type RowTest, rounding } from "../../signal/row-test.ts";
import { type SpikeSettings, SpikeWindow } from "../../signal/spike-window.ts";
import { SteepestChange } from "../../signal/steepest-change.ts";
import { StuckRun } from "../../signal/stuck-run.ts";
import type { RowStageKernel } from "../stage.ts";
import { RowFindings } from "./row-findings.ts";
import { RowQueue } from "./row-queue.ts";
import type { Stretch } from "./stretch.ts";

export interface ScreenTests {
  readonly range: { readonly low: number; readonly high: number } | null;
  /** Steepest change, per microsecond. */
  readonly steepest: number | null;
  readonly spike: SpikeSettings | null;
  readonly stuck: { readonly over_us: number; readonly within: number } | null;
  readonly agree: { readonly partner: number; readonly within: number } | null;
  readonly stretch: Stretch;
  /** Channels in all, and those that are tested. */
  readonly channels: number;
  readonly selected: readonly number[];
}

/** Reasons by number: 0 is none. */
const REASONS = ["", "range", "rate-of-change", "spike", "stuck"] as const;
const AGREE = "agree";
/** Rows emitted at a time; only the size of blocks depends on it. */
const ROWS = 8192;

/** One channel's tests in their order. */
interface Lane {
  readonly channel: number;
  readonly tests: readonly RowTest[];
  /** By test: the row that it sees next, and the row before which it has decided. */
  readonly next: number[];
  readonly decided: number[];
}

class PlausibleRange implements RowTest {
  private readonly low: number;
  private readonly high: number;
  private readonly reject: Reject;

  constructor({ low, high }: { readonly low: number; readonly high: number }, reject: Reject) {
    this.low = low;
    this.high = high;
    this.reject = reject;
  }

  push(row: number, _t: number, value: number): number {
    if (value < this.low || value > this.high) this.reject(row);
    return row + 1;
  }

  flush(): void {}
}

export class Screening implements RowStageKernel {
  private readonly set: ScreenTests;
  private readonly queue: RowQueue;
  private readonly lanes: readonly Lane[];
  private readonly findings: readonly RowFindings[];

  constructor(set: ScreenTests) {
    this.set = set;
    this.queue = new RowQueue(set.channels);
    this.lanes = set.selected.map((channel) => {
      const tests = this.testsOf(channel);
      return { channel, tests, next: tests.map(() => 0), decided: tests.map(() => 0) };
    });
    const { agree } = set;
    this.findings = Array.from({ length: set.channels }, (_, c) => {
      const tested = set.selected.includes(c);
      const given = [set.range, set.steepest, set.spike, set.stuck];
      return new RowFindings({
        rejected: tested ? REASONS.slice(1).filter((_, i) => given[i] !== null) : [],
        suspect: agree !== null && (tested || c === agree.partner) ? [AGREE] : [],
      });
    });
  }

  push: RowStageKernel["push"] = (block, emit) => {
    this.queue.append(block);
    this.advance(false);
    this.release(emit);
  };

  flush: RowStageKernel["flush"] = (emit) => {
    this.advance(true);
    this.release(emit);
  };

  effect: RowStageKernel["effect"] = (channel) => this.findings[channel]!.effect();

  private testsOf(channel: number): RowTest[] {
    const { range, steepest, spike, stuck } = this.set;
    const because = (reason: number) => (row: number) => {
      this.queue.reasons[channel]![row - this.queue.origin] = reason;
    };
    return [
      ...(range === null ? [] : [new PlausibleRange(range, because(1))]),
      ...(steepest === null ? [] : [new SteepestChange(steepest, because(2))]),
      ...(spike === null ? [] : [new SpikeWindow(spike, because(3))]),
      ...(stuck === null ? [] : [new StuckRun(stuck.over_us, stuck.within, because(4))]),
    ];
  }

  /** Feeds each test with the rows that the one before it has decided. */
  private advance(ended: boolean): void {
    const { queue } = this;
    const { from_us, until_us } = this.set.stretch;
    for (const { channel, tests, next, decided } of this.lanes) {
      const values = queue.columns[channel]!;
      const reasons = queue.reasons[channel]!;
      let limit = queue.end;
      for (const [n, test] of tests.entries()) {
        for (let row = next[n]!; row < limit; row++) {
          const i = row - queue.origin;
          const t = queue.times[i]!;
          const seen = reasons[i] === 0 && t >= from_us && t < until_us;
          decided[n] = test.push(row, t, seen ? values[i]! : Number.NaN);
        }
        next[n] = limit;
        if (ended) {
          test.flush();
          decided[n] = limit;
        }
        limit = decided[n]!;
      }
    }
  }

  private release(emit: (block: MarkedRows) => void): void {
    const { queue, lanes } = this;
    const until = Math.min(queue.end, ...lanes.map((lane) => lane.decided.at(-1) ?? queue.end));
    while (queue.base < until) {
      const count = Math.min(ROWS, until - queue.base);
      const block = queue.take(count, (c, reasons, times, values, marks) => {
        for (let i = 0; i < count; i++) {
          const reason = reasons[i]!;
          if (reason === 0) continue;
          this.findings[c]!.reject(times[i]!, values[i]!, REASONS[reason]!);
          values[i] = Number.NaN;
          marks[i] = SCREENED;
        }
      });
      this.compare(block);
      emit(block);
    }
  }

  /** Two channels that differ by more than they may are both suspect. */
  private compare({ count, times, columns, marks }: MarkedRows): void {
    const { agree, selected, stretch } = this.set;
    if (agree === null) return;
    const b = columns[agree.partner]!;
    const doubted = new Uint8Array(count);
    for (const c of selected) {
      if (c === agree.partner) continue;
      const a = columns[c]!;
      for (let i = 0; i < count; i++) {
        const t = times[i]!;
        if (t < stretch.from_us || t >= stretch.until_us) continue;
        if (!(Math.abs(a[i]! - b[i]!) > agree.within * (1 + 1e-9) + rounding(a[i]!, b[i]!))) continue;
        marks[c]![i]! |= SUSPECT;
        this.findings[c]!.doubt(t, a[i]!, AGREE);
        doubted[i] = 1;
      }
    }
    for (let i = 0; i < count; i++) {
      if (doubted[i] === 0) continue;
      marks[agree.partner]![i]! |= SUSPECT;
      this.findings[agree.partner]!.doubt(times[i]!, b[i]!, AGREE);
    }
  }
}
