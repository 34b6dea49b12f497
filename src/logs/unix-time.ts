const ZERO = 48;
const NINE = 57;

/** Digits after the decimal sign that one microsecond is worth, by the unit of the count. */
export const UNIX_UNITS = { "unix-s": 6, "unix-ms": 3, "unix-us": 0, "unix-ns": -3 } as const;

/**
 * Reads a count of seconds, milliseconds, microseconds or nanoseconds since 1970-01-01T00:00:00Z, digit by
 * digit as an integer. Finer digits are rounded half up to the microsecond.
 * @param shift  decimal places between the unit and a microsecond (UNIX_UNITS)
 * @param onRounded  told when digits finer than a microsecond were not all zero
 * @returns integer microseconds, NaN when the cell is not such a count; may exceed the exact range (2^53)
 */
export function readUnixTime(cell: string, shift: number, onRounded: () => void): number {
  const length = cell.length;
  let at = 0;
  const first = cell.charCodeAt(0);
  if (first === 43 || first === 45) at = 1;
  const start = at;
  while (at < length && isDigit(cell.charCodeAt(at))) at++;
  const point = at;
  if (at < length) {
    const code = cell.charCodeAt(at);
    if (code !== 46 && code !== 44) return Number.NaN;
    at++;
    while (at < length && isDigit(cell.charCodeAt(at))) at++;
    if (at < length) return Number.NaN;
  }
  const decimals = Math.max(0, length - point - 1);
  const whole = point - start;
  if (whole + decimals === 0) return Number.NaN;
  const digit = (i: number): number => {
    // The i-th digit of the number with its decimal sign taken out.
    if (i < whole) return cell.charCodeAt(start + i) - ZERO;
    return i < whole + decimals ? cell.charCodeAt(point + 1 + i - whole) - ZERO : 0;
  };
  const kept = whole + shift;
  let value = 0;
  for (let i = 0; i < kept; i++) value = value * 10 + digit(i);
  const next = kept >= 0 ? digit(kept) : 0;
  let rest = false;
  for (let i = Math.max(0, kept); i < whole + decimals; i++) if (digit(i) !== 0) rest = true;
  if (rest) onRounded();
  if (first !== 45) return next >= 5 ? value + 1 : value;
  let beyondHalf = next > 5;
  if (next === 5) for (let i = kept + 1; i < whole + decimals; i++) if (digit(i) !== 0) beyondHalf = true;
  const negative = beyondHalf ? -value - 1 : -value;
  return negative === 0 ? 0 : negative;
}

function isDigit(code: number): boolean {
  return code >= ZERO && code <= NINE;
}
