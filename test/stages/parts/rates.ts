/** The rates at which every stage is held to its contract. */
import type { Entry } from "../../engine/harness.ts";

export interface Rate {
  readonly name: string;
  readonly grid: Readonly<Record<string, string>>;
  /** Exact: num / den microseconds. */
  readonly num: number;
  readonly den: number;
}

export const RATES: readonly Rate[] = [
  { name: "1 s", grid: { interval: "1 s" }, num: 1_000_000, den: 1 },
  { name: "10 ms", grid: { interval: "10 ms" }, num: 10_000, den: 1 },
  { name: "1/360 s", grid: { rate: "360 Hz" }, num: 25_000, den: 9 },
  { name: "1 min", grid: { interval: "1 min" }, num: 60_000_000, den: 1 },
];

export const interval_us = (rate: Rate): number => rate.num / rate.den;

/** A length of n intervals as the pipeline file writes it; n a multiple of 9, so that 1/360 s comes out whole. */
export const lengthOf = (rate: Rate, n: number): string => `${(n / rate.den) * rate.num} us`;

/** The grid stage at a rate; rows farther apart than `joined` intervals are not joined. */
export function gridEntry(rate: Rate, joined: number, more: Record<string, unknown> = {}): Entry {
  return {
    stage: "resample",
    ...rate.grid,
    "longest-gap": `${Math.round(joined * interval_us(rate))} us`,
    ...more,
  };
}
