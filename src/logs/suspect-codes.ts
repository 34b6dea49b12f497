/**
 * Numbers that loggers and data formats write in place of a missing value (common practice; the last three are
 * the default fill values of netCDF and a habit of model output).
 */
const SUSPECTS = new Set([
  -99, -999, -9999, -99999, -999999, 9999, 99999, 999999, -99.9, -999.9, -9999.9, -999.99, -6999, 6999, -7999,
  7999, -32768, 9.969209968386869e36, 9.97e36, 1e30, -1e30, 1e20,
]);

/** True where a value would be taken for a missing code by people who know loggers. */
export function isSuspectCode(value: number): boolean {
  return (value <= -99 || value >= 6999) && SUSPECTS.has(value);
}
