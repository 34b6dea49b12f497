import type { ZoneOffsets } from "./zone-offsets.ts";

/** A row this many overlaps after the one before it does not show by its order which pass it belongs to. */
const PROOF_REACH = 2;

/**
 * Turns the local times of one log into UTC, row after row. Where the clock was put back, an hour appears twice;
 * the order of the rows says which pass a row belongs to: the one nearer to where the next row is due.
 */
export class LocalClock {
  /** Rows in a repeated hour, by pass, and those among them that no row before shows to be in it. */
  readonly repeated = { first: 0, second: 0, unproven: 0 };
  private readonly zone: ZoneOffsets;
  private previous_us = Number.NaN;
  private step_us = 0;

  constructor(zone: ZoneOffsets) {
    this.zone = zone;
  }

  /** UTC of a local time, both in microseconds; NaN when the clock of the zone never showed it. */
  utc(local_us: number): number {
    const instants = this.zone.instants(local_us);
    if (instants.length === 0) return Number.NaN;
    const utc = instants.length === 1 ? instants[0]! : this.pass(instants[0]!, instants.at(-1)!);
    const step = utc - this.previous_us;
    if (step > 0) this.step_us = step;
    this.previous_us = utc;
    return utc;
  }

  private pass(first: number, second: number): number {
    const due = this.previous_us + this.step_us;
    const takeSecond = Math.abs(second - due) < Math.abs(first - due);
    const utc = takeSecond ? second : first;
    if (takeSecond) this.repeated.second++;
    else this.repeated.first++;
    const away = Math.abs(utc - this.previous_us);
    if (!(away <= Math.max(PROOF_REACH * (second - first), PROOF_REACH * this.step_us)))
      this.repeated.unproven++;
    return utc;
  }
}
