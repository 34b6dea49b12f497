const ZERO = 48;
const NINE = 57;

/**
 * Reads a decimal number as people and loggers write it: sign, digits with at most one decimal sign, exponent
 * (with E, or with D as Fortran writes it).
 * Everything else that a programming language might take for a number (0x1F, 12abc, 1_000, true, a blank,
 * Infinity) is not one, nor is a number too large for float64.
 * @param decimalSign  "." or ","
 * @returns the nearest float64, or NaN when the cell is not a finite number
 */
export function readNumber(cell: string, decimalSign: "." | ","): number {
  const length = cell.length;
  const sign = decimalSign.charCodeAt(0);
  let at = 0;
  let code = cell.charCodeAt(0);
  if (code === 43 || code === 45) code = cell.charCodeAt(++at);
  let digits = 0;
  let point = -1;
  while (at < length) {
    if (code >= ZERO && code <= NINE) digits++;
    else if (code === sign && point < 0) point = at;
    else break;
    code = cell.charCodeAt(++at);
  }
  if (digits === 0) return Number.NaN;
  let fortran = -1;
  if (at < length) {
    if (code === 68 || code === 100) fortran = at;
    else if (code !== 69 && code !== 101) return Number.NaN;
    code = cell.charCodeAt(++at);
    if (code === 43 || code === 45) code = cell.charCodeAt(++at);
    const from = at;
    while (code >= ZERO && code <= NINE) code = cell.charCodeAt(++at);
    if (at === from || at < length) return Number.NaN;
  }
  let text = cell;
  if (decimalSign === "," && point >= 0) text = `${cell.slice(0, point)}.${cell.slice(point + 1)}`;
  if (fortran >= 0) text = `${text.slice(0, fortran)}e${text.slice(fortran + 1)}`;
  const value = Number(text);
  return Number.isFinite(value) ? value : Number.NaN;
}
