/** Dirty logs made by fast-check, and a plain reader of them that knows nothing of streams or buffers. */
import fc from "fast-check";

const START_US = 1_714_521_600_000_000;

export interface DirtyLog {
  readonly text: string;
  readonly lateBy_us: number;
}

/** What a row is made to be; steps are whole seconds. */
type RowKind =
  | { readonly kind: "row"; readonly step: number; readonly a: string; readonly b: string }
  | { readonly kind: "repeat"; readonly back: number; readonly a: string | null }
  | { readonly kind: "text"; readonly line: string };

const cell = fc.oneof(
  { weight: 6, arbitrary: fc.integer({ min: -9, max: 9 }).map(String) },
  { weight: 2, arbitrary: fc.constantFrom("", "-9999", "-9999.0", "NAN") },
  { weight: 1, arbitrary: fc.constantFrom("0x1F", "12abc", "1_000", "true", "1 2", "Infinity", "1e309") },
);

const rowKind: fc.Arbitrary<RowKind> = fc.oneof(
  {
    weight: 10,
    arbitrary: fc.record({
      kind: fc.constant("row" as const),
      step: fc.integer({ min: 0, max: 3 }),
      a: cell,
      b: cell,
    }),
  },
  {
    weight: 3,
    arbitrary: fc.record({
      kind: fc.constant("row" as const),
      step: fc.integer({ min: -12, max: -1 }),
      a: cell,
      b: cell,
    }),
  },
  {
    weight: 2,
    arbitrary: fc.record({
      kind: fc.constant("repeat" as const),
      back: fc.integer({ min: 1, max: 6 }),
      a: fc.option(cell),
    }),
  },
  {
    weight: 1,
    arbitrary: fc.record({
      kind: fc.constant("text" as const),
      line: fc.constantFrom("", "# note", "x", "1,2,3,4", "time,a,b", "yesterday,1,2", ",,", "  ", ",1,2"),
    }),
  },
);

export const dirtyLog: fc.Arbitrary<DirtyLog> = fc
  .record({
    kinds: fc.array(rowKind, { minLength: 1, maxLength: 120 }),
    lateBy: fc.integer({ min: 0, max: 10 }),
    end: fc.constantFrom("\n", "\r\n", "\r"),
    closed: fc.boolean(),
  })
  .map(({ kinds, lateBy, end, closed }) => {
    const lines = ["time,a,b", `${new Date(START_US / 1000).toISOString()},0,0`];
    let time = START_US;
    const made: string[] = [lines[1]!];
    for (const kind of kinds) {
      let line: string;
      if (kind.kind === "text") line = kind.line;
      else if (kind.kind === "repeat") {
        const earlier = made[Math.max(0, made.length - kind.back)]!;
        line = kind.a === null ? earlier : earlier.replace(/,[^,]*,/, `,${kind.a},`);
      } else {
        time += kind.step * 1e6;
        line = `${new Date(time / 1000).toISOString()},${kind.a},${kind.b}`;
        made.push(line);
      }
      lines.push(line);
    }
    return { text: lines.join(end) + (closed ? end : ""), lateBy_us: lateBy * 1e6 };
  });

export interface TwinResult {
  rows: number[][];
  read: number;
  used: number;
  merged: number;
  aside: Record<string, number[]>;
  reordered: number[];
  missing: number[];
  unreadable: number[][];
}

/** Reads such a log line by line with the plainest means. Lists of lines are whole, not the first few. */
export function plainRead({ text, lateBy_us }: DirtyLog): TwinResult {
  const result: TwinResult = {
    rows: [],
    read: 0,
    used: 0,
    merged: 0,
    aside: {},
    reordered: [],
    missing: [0, 0],
    unreadable: [[], []],
  };
  const aside = (reason: string, line: number) => {
    (result.aside[reason] ??= []).push(line);
  };
  const kept: { time: number; values: number[]; line: number; moved: boolean }[] = [];
  let newest = Number.NEGATIVE_INFINITY;
  const lines = text.split(/\r\n|\n|\r/);
  lines.forEach((lineText, i) => {
    const line = i + 1;
    if (line === 1 || lineText.trim() === "" || lineText.startsWith("#")) return;
    result.read++;
    const cells = lineText.split(",").map((c) => c.trim());
    // The last line has no line end, and its last cell is an integer or no number: it may have been cut.
    if (line === lines.length) {
      aside("cut-short", line);
      return;
    }
    if (cells.length !== 3) {
      aside("ragged", line);
      return;
    }
    if (cells[0] === "time") {
      aside("repeated-names", line);
      return;
    }
    if (!/^\d{4}-\d\d-\d\dT\d\d:\d\d:\d\d\.000Z$/.test(cells[0]!)) {
      aside("unreadable-time", line);
      return;
    }
    const time = Date.parse(cells[0]!) * 1000;
    const values = cells.slice(1).map((c, k) => {
      if (c === "" || c === "NAN" || Number(c) === -9999) {
        result.missing[k]!++;
        return Number.NaN;
      }
      if (/^-?\d$/.test(c)) return Number(c);
      result.unreadable[k]!.push(line);
      return Number.NaN;
    });
    const bad = result.unreadable.some((list) => list.at(-1) === line);
    if (bad && values.every(Number.isNaN)) {
      aside("no-readable-value", line);
      return;
    }
    if (time < newest - lateBy_us) {
      aside("late", line);
      return;
    }
    const same = kept.find((row) => row.time === time);
    if (same === undefined) kept.push({ time, values, line, moved: time < newest });
    else if (
      values.some((v, k) => !Number.isNaN(v) && !Number.isNaN(same.values[k]!) && v !== same.values[k])
    )
      aside("conflicting-time", line);
    else {
      result.merged++;
      values.forEach((v, k) => {
        if (Number.isNaN(same.values[k]!)) same.values[k] = v;
      });
    }
    newest = Math.max(newest, time);
  });
  kept.sort((a, b) => a.time - b.time);
  result.used = kept.length;
  result.rows = kept.map((row) => [row.time, ...row.values]);
  result.reordered = kept
    .filter((row) => row.moved)
    .map((row) => row.line)
    .sort((a, b) => a - b);
  return result;
}
