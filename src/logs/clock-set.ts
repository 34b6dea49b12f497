/** Days on which clocks start that have lost their date (common practice: Unix, RTC chips, GPS). */
const EPOCHS_US = [
  Date.UTC(1970, 0, 1),
  Date.UTC(1980, 0, 1),
  Date.UTC(1980, 0, 6),
  Date.UTC(2000, 0, 1),
].map((ms) => ms * 1000);
/** How long a logger may run on such a clock before it is set. */
const LONGEST_UNSET_US = 7 * 86_400e6;
const LEAST_STEP_US = 365 * 86_400e6;
/** Rows that must follow the setting of the clock to prove it. */
const WITNESSES = 3;

/**
 * Finds where the clock was set in a log that starts at one of the days from which lost clocks count.
 * @param rows  the first rows of the log, in the order of the file; times in microseconds
 * @returns the line of the first row with the true time; 0 when the log does not start so
 */
export function findClockSet(rows: readonly { readonly line: number; readonly time: number }[]): number {
  const start = rows[0]?.time ?? Number.NaN;
  const epoch = EPOCHS_US.find((day) => start >= day && start < day + LONGEST_UNSET_US);
  if (epoch === undefined) return 0;
  const set = rows.findIndex(({ time }) => time < epoch || time >= epoch + LONGEST_UNSET_US);
  if (set < 0) return 0;
  const after = rows.slice(set);
  const proven = after.length >= WITNESSES && after.every(({ time }) => time - epoch > LEAST_STEP_US);
  return proven ? rows[set]!.line : 0;
}
