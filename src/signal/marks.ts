/**
 * What is known about a sample besides its value: one bit for each thing that holds.
 * The bits stand in the order of the states, so the highest bit set is the sample's state.
 */
export const MEASURED = 0;
/** Rests on an interpolated sample within its reach. */
export const FILLED = 1;
/** Its window was not full. */
export const END = 2;
/** Coverage below full but enough. */
export const THIN = 4;
/** A screen or an alias limit says so. */
export const SUSPECT = 8;
/** Its future is not there yet. */
export const PROVISIONAL = 16;
/** Rests on nothing but rejected values. */
export const SCREENED = 32;
export const MISSING = 64;

/** Marks that a value hands on to everything computed from it. */
export const CARRIED = FILLED | END | THIN | SUSPECT | PROVISIONAL;

export const STATES = [
  "measured",
  "filled",
  "end",
  "thin",
  "suspect",
  "provisional",
  "screened",
  "missing",
] as const;

/** Primary codes of the QARTOD open standard (IOOS, 2014), by place in STATES. */
export const STATE_FLAGS = [1, 3, 3, 3, 3, 2, 4, 9] as const;

/** Place in STATES of the last state that holds: 0 for no mark, else 1 + the highest bit. */
export function stateOf(mark: number): number {
  return 32 - Math.clz32(mark);
}
