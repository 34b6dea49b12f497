/** What a row stage kept out of one channel, or called suspect: counted by reason, the first ones kept. */
import type { RowEffect, RowFinding } from "../stage.ts";

/** Raw values listed per channel and kind. */
const LISTED = 20;

export class RowFindings {
  private readonly rejected = new Map<string, number>();
  private readonly suspect = new Map<string, number>();
  private readonly firstRejected: RowFinding[] = [];
  private readonly firstSuspect: RowFinding[] = [];

  /** @param reasons  in the order in which the account lists them, found or not */
  constructor(reasons: { readonly rejected: readonly string[]; readonly suspect: readonly string[] }) {
    for (const reason of reasons.rejected) this.rejected.set(reason, 0);
    for (const reason of reasons.suspect) this.suspect.set(reason, 0);
  }

  reject(time_us: number, value: number, reason: string): void {
    this.rejected.set(reason, (this.rejected.get(reason) ?? 0) + 1);
    if (this.firstRejected.length < LISTED) this.firstRejected.push({ time_us, value, reason });
  }

  doubt(time_us: number, value: number, reason: string): void {
    this.suspect.set(reason, (this.suspect.get(reason) ?? 0) + 1);
    if (this.firstSuspect.length < LISTED) this.firstSuspect.push({ time_us, value, reason });
  }

  effect(notes: Readonly<Record<string, unknown>> = {}): RowEffect {
    return {
      rejected: Object.fromEntries(this.rejected),
      suspect: Object.fromEntries(this.suspect),
      firstRejected: this.firstRejected,
      firstSuspect: this.firstSuspect,
      notes,
    };
  }
}
