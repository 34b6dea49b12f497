/** Text for people at a terminal of 80 columns. */

/** A number with at most `digits` significant digits, without trailing zeros or a minus zero. */
export function figure(x: number | null | undefined, digits = 4): string {
  if (x === null || x === undefined || Number.isNaN(x)) return "–";
  if (!Number.isFinite(x)) return x > 0 ? "∞" : "-∞";
  return String(Number((Object.is(x, -0) ? 0 : x).toPrecision(digits)));
}

/** A whole number in groups of three, for reading. */
export function grouped(n: number): string {
  return String(n).replace(/\B(?=(\d{3})+(?!\d))/g, " ");
}

/** Unit, its length in seconds, and from how many of it on it reads better than the next smaller one. */
const TIME_UNITS = [
  ["d", 86_400, 2],
  ["h", 3600, 2],
  ["min", 60, 2],
  ["s", 1, 1],
  ["ms", 1e-3, 1],
  ["µs", 1e-6, 1],
] as const;

/** A length of time with the unit that reads best: a whole number of a larger unit, or enough of it. */
export function timeText(s: number | null, digits = 4): string {
  if (s === null) return "whole record";
  if (s === 0) return "0 s";
  const size = Math.abs(s);
  for (const [unit, factor, enough] of TIME_UNITS) {
    const n = size / factor;
    if ((n >= 1 && Math.abs(n - Math.round(n)) < 1e-9) || n >= enough)
      return `${figure(s / factor, digits)} ${unit}`;
  }
  return `${figure(s * 1e6, digits)} µs`;
}

/** A frequency with its period: `2 mHz (8.333 min)`. */
export function frequencyText(hz: number | null | undefined, withPeriod = true): string {
  if (hz === null || hz === undefined) return "–";
  if (hz === 0) return "0 Hz";
  const [unit, factor] =
    hz < 1e-3
      ? (["µHz", 1e-6] as const)
      : hz < 1
        ? (["mHz", 1e-3] as const)
        : hz < 1000
          ? (["Hz", 1] as const)
          : (["kHz", 1e3] as const);
  return `${figure(hz / factor)} ${unit}${withPeriod ? ` (${timeText(1 / hz)})` : ""}`;
}

/** Breaks text at blanks so that no line is longer than `width`; leading blanks stay, later lines start with `indent`. */
export function wrap(text: string, width: number, indent = ""): string {
  const lead = /^ */.exec(text)![0];
  const lines: string[] = [];
  let line = lead;
  let empty = true;
  for (const word of text.slice(lead.length).split(" ")) {
    if (!empty && line.length + 1 + word.length > width) {
      lines.push(line.trimEnd());
      line = indent + word;
    } else line += empty ? word : ` ${word}`;
    empty = false;
  }
  lines.push(line.trimEnd());
  return lines.join("\n");
}

/** Columns padded to their widest cell; the first is flush left, the others flush right. */
export function table(rows: readonly (readonly string[])[], gap = 2): string {
  const widths: number[] = [];
  for (const row of rows)
    row.forEach((cell, i) => {
      widths[i] = Math.max(widths[i] ?? 0, cell.length);
    });
  return rows
    .map((row) =>
      row
        .map((cell, i) => (i === 0 ? cell.padEnd(widths[i]!) : cell.padStart(widths[i]!)))
        .join(" ".repeat(gap))
        .trimEnd(),
    )
    .join("\n");
}
