/**
 * Numbers that loggers and model output write in place of a missing value (common practice).
 */
const CODES = new Set([
  -99, -999, -9999, -99999, -999999, 9999, 99999, 999999, -99.9, -999.9, -9999.9, -999.99, -6999, 6999, -7999,
  7999, -32768, 1e20,
]);
/** No instrument measures this much in any unit; the default fill values of netCDF (9.97e36) lie above it. */
const NOTHING_REAL = 1e30;
/** How far from all other values, as a share of itself, a code must stand: a counter that passes 9999 is none. */
const APART = 0.1;

export interface Suspect {
  readonly value: number;
  count: number;
  readonly firstLines: number[];
}

/** Watches one channel for numbers that look like codes for a missing value but are not listed as such. */
export class SuspectCodes {
  private readonly found = new Map<number, Suspect>();
  private huge: Suspect | null = null;
  private lowest = Number.POSITIVE_INFINITY;
  private highest = Number.NEGATIVE_INFINITY;

  /** Takes one value; gives the tally that it belongs to when it looks like a code. */
  watch(value: number): Suspect | null {
    if (value > -99 && value < 6999) {
      if (value < this.lowest) this.lowest = value;
      if (value > this.highest) this.highest = value;
      return null;
    }
    if (Math.abs(value) >= NOTHING_REAL) return (this.huge ??= { value, count: 0, firstLines: [] });
    if (CODES.has(value)) {
      const suspect = this.found.get(value) ?? { value, count: 0, firstLines: [] };
      this.found.set(value, suspect);
      return suspect;
    }
    if (value < this.lowest) this.lowest = value;
    if (value > this.highest) this.highest = value;
    return null;
  }

  /** The codes that stand well apart from all other values of the channel. */
  suspects(): Suspect[] {
    const apart = [...this.found.values()].filter(({ value }) => {
      const margin = APART * Math.abs(value);
      return value < this.lowest - margin || value > this.highest + margin;
    });
    return this.huge === null ? apart : [...apart, this.huge];
  }
}
