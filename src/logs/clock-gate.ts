/** Decides whether a row whose time jumps far ahead is to be believed, before any row can be called late by it. */

const DAY_US = 86_400e6;
/** A jump ahead by at least this much (and three times the horizon) is believed only when rows confirm it. */
const LEAST_JUMP_US = 1800e6;
/** Rows that must follow a jump to confirm it, and as many that must go back to refute it. */
const WITNESSES = 3;
/** The same for jumps of more than a month. */
const WITNESSES_FAR = 50;
const FAR_US = 30 * DAY_US;
/** A last row that jumps further than a month and this many steps of the rows before stays unconfirmed. */
const STEPS_AT_END = 10;
/** A clock that goes back by more than this has lost its date. */
const RESET_US = 365 * DAY_US;

interface HeldRow {
  readonly time: number;
  readonly line: number;
  readonly values: Float64Array;
}

export interface GateOutlet {
  pass(time: number, line: number, values: Float64Array): void;
  setAside(reason: "late" | "stray-time", line: number): void;
}

/**
 * Rows go straight through while the clock behaves. A jump ahead is held back with the rows after it until three
 * of them stand by it (it is passed) or three go on where the clock was before (it is set aside as a stray time);
 * otherwise one wrong date would make every later row late.
 */
export class ClockGate {
  private readonly lateBy_us: number;
  private readonly jump_us: number;
  private readonly outlet: GateOutlet;
  private newest_us = Number.NEGATIVE_INFINITY;
  private step_us = 0;
  private held: HeldRow[] = [];

  constructor(lateBy_us: number, outlet: GateOutlet) {
    this.lateBy_us = lateBy_us;
    this.jump_us = Math.max(LEAST_JUMP_US, 3 * lateBy_us);
    this.outlet = outlet;
  }

  add(time: number, line: number, values: Float64Array): void {
    if (time < this.newest_us - this.lateBy_us) {
      this.outlet.setAside(time < this.newest_us - RESET_US ? "stray-time" : "late", line);
      return;
    }
    if (this.held.length === 0 && time <= this.newest_us + this.jump_us) {
      this.pass(time, line, values);
      return;
    }
    this.held.push({ time, line, values: values.slice() });
    this.settle(false);
  }

  /** No more rows come: what is still held is decided by the rows that there are. */
  end(): void {
    this.settle(true);
  }

  private pass(time: number, line: number, values: Float64Array): void {
    if (time > this.newest_us) {
      if (Number.isFinite(this.newest_us)) this.step_us = time - this.newest_us;
      this.newest_us = time;
    }
    this.outlet.pass(time, line, values);
  }

  private settle(final: boolean): void {
    while (this.held.length > 0) {
      const first = this.held[0]!;
      const verdict = this.verdict(first, final);
      if (verdict === "open") return;
      this.held.shift();
      if (verdict === "pass") this.pass(first.time, first.line, first.values);
      else this.outlet.setAside(verdict, first.line);
    }
  }

  private verdict(row: HeldRow, final: boolean): "pass" | "stray-time" | "late" | "open" {
    const { newest_us } = this;
    const ahead = row.time - newest_us;
    if (ahead < -this.lateBy_us) return ahead < -RESET_US ? "stray-time" : "late";
    if (ahead <= this.jump_us) return "pass";
    let by = 0;
    let against = 0;
    for (let i = 1; i < this.held.length; i++)
      if (this.held[i]!.time < row.time - this.jump_us) against++;
      else by++;
    const trusted = Number.isFinite(newest_us);
    const far = trusted ? ahead > FAR_US : this.held.some(({ time }) => row.time - time > FAR_US);
    if (by >= (far ? WITNESSES_FAR : WITNESSES)) return "pass";
    // Before any row is trusted, neither side of a far jump is: the longer one is then believed.
    if (against >= (far && !trusted ? WITNESSES_FAR : WITNESSES)) return "stray-time";
    if (!final) return "open";
    if (against > by) return "stray-time";
    const unconfirmed = by === 0 && trusted && ahead > Math.max(FAR_US, STEPS_AT_END * this.step_us);
    return unconfirmed ? "stray-time" : "pass";
  }
}
