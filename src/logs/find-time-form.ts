import type { TimeForm } from "./rows.ts";
import { type ClockSettings, TimeReader } from "./time-reader.ts";

/** What the time cells of a log say about their form. */
export type FoundForm =
  | { readonly kind: "found"; readonly form: TimeForm }
  /** Several forms fit, and they mean different times. */
  | { readonly kind: "unclear"; readonly forms: readonly TimeForm[]; readonly cell: string }
  /** Times of day without a date. */
  | { readonly kind: "no-date"; readonly form: TimeForm; readonly cell: string }
  | { readonly kind: "none"; readonly cell: string };

/** Digits in a count of time since 1970, by unit, for the years 1990 to 2100. */
const COUNTS: readonly (readonly [string, number, number])[] = [
  ["unix-s", 6.3e8, 4.2e9],
  ["unix-ms", 6.3e11, 4.2e12],
  ["unix-us", 6.3e14, 4.2e15],
  ["unix-ns", 6.3e17, 4.2e18],
];

const DATES = [
  "yyyy/MM/dd",
  "yyyy.MM.dd",
  "yyyy-MM-dd",
  "dd.MM.yyyy",
  "dd/MM/yyyy",
  "MM/dd/yyyy",
  "dd-MM-yyyy",
  "MM-dd-yyyy",
  "dd.MM.yy",
  "dd/MM/yy",
  "MM/dd/yy",
  "yy/MM/dd",
  "dd-MM-yy",
  "MM-dd-yy",
  "yy-MM-dd",
  "dd-MMM-yyyy",
  "dd-MMM-yy",
  "dd MMM yyyy",
  "dd MMM yy",
  "dd/MMM/yyyy",
  "MMM dd yyyy",
  "MMM dd, yyyy",
  "EEE MMM dd yyyy",
];
const TIMES = ["HH:mm:ss", "HH:mm:ss.SSS", "HH:mm", "h:mm:ss a", "h:mm a", "HH.mm.ss", "HHmmss"];
const TOUCHING = [
  "yyyyMMddHHmmss",
  "yyyyMMddHHmm",
  "yyyyMMdd HHmmss",
  "yyyyMMdd HHmm",
  "yyyyMMdd HH:mm:ss",
  "yyyyMMdd HH:mm:ss.SSS",
  "yyyyMMdd HH:mm",
];
const GLUES = [" ", "'T'", ", ", " - "];

/** Share of the cells that the better form reads, from which on a lesser form may have been meant. */
const NEARLY_ALL = 0.75;

let candidates: readonly TimeForm[] | undefined;

/** Every date with every time, and dates alone. */
function forms(): readonly TimeForm[] {
  candidates ??= [
    "iso-8601",
    ...TOUCHING,
    ...DATES.flatMap((date) => [
      date,
      ...GLUES.flatMap((glue) => TIMES.map((time) => `${date}${glue}${time}`)),
    ]),
  ];
  return candidates;
}

/**
 * Finds the form of time cells. Only what all cells together settle is found: whether 03/04 is a day and a month
 * or a month and a day is asked, not guessed.
 * @param cells  time cells in the order of the file
 * @param among  forms to choose from
 */
export function findTimeForm(
  cells: readonly string[],
  settings: ClockSettings,
  among: readonly TimeForm[] = forms(),
): FoundForm {
  const filled = cells.filter((cell) => cell !== "");
  const first = filled[0] ?? "";
  if (filled.length === 0) return { kind: "none", cell: first };
  const count = countForm(filled);
  if (count !== null) return { kind: "found", form: count };
  // No other form reads what ISO 8601 reads, so where it reads all there is nothing left to compare.
  if (tryForm("iso-8601", filled, settings).read === filled.length)
    return { kind: "found", form: "iso-8601" };
  const fits = among
    .map((form) => ({ form, ...tryForm(form, filled, settings) }))
    .filter(({ read }) => 2 * read > filled.length);
  const most = Math.max(0, ...fits.map((f) => f.read));
  const best = fits.filter((f) => f.read === most);
  if (best.length === 0) {
    const form = TIMES.find(
      (time) => tryForm(time, filled, { ...settings, date: "2000-01-01" }).read * 2 > filled.length,
    );
    if (form === undefined) return { kind: "none", cell: first };
    return settings.date === undefined ? { kind: "no-date", form, cell: first } : { kind: "found", form };
  }
  const winner = best[0]!;
  // A form that reads a few cells less but keeps the times in better order was perhaps meant, with cells damaged.
  const rivals = [
    ...best.slice(1),
    ...fits.filter((f) => f.read < most && f.read > NEARLY_ALL * most && f.backward < winner.backward),
  ];
  const unlike = rivals.filter((f) => f.print !== winner.print);
  if (unlike.length > 0)
    return {
      kind: "unclear",
      forms: [winner.form, ...new Set(unlike.map((f) => f.form))].slice(0, 3),
      cell: first,
    };
  return { kind: "found", form: winner.form };
}

function countForm(cells: readonly string[]): TimeForm | null {
  const counts = cells.filter((cell) => /^\d{9,19}(?:[.,]\d+)?$/.test(cell)).map(Number);
  if (2 * counts.length <= cells.length) return null;
  const found = COUNTS.find(
    ([, low, high]) => counts.filter((n) => n >= low && n < high).length * 2 > cells.length,
  );
  return found?.[0] ?? null;
}

interface Trial {
  readonly read: number;
  /** How often the time steps back from one cell to the next. */
  readonly backward: number;
  /** Digest of all times: two forms with the same one mean the same times. */
  readonly print: number;
}

/** Cells that a form must fail on, without reading one before, to be given up. */
const FAILED_ENOUGH = 8;

function tryForm(form: TimeForm, cells: readonly string[], settings: ClockSettings): Trial {
  const reader = TimeReader.make(form, { ...settings, zone: "UTC" });
  let read = 0;
  let backward = 0;
  let previous = Number.NEGATIVE_INFINITY;
  let print = 0;
  let tried = 0;
  for (const cell of reader instanceof TimeReader ? cells : []) {
    const time = (reader as TimeReader).time(cell);
    if (read === 0 && ++tried > FAILED_ENOUGH) break;
    print = Math.imul(print, 16_777_619) ^ (Number.isNaN(time) ? 1 : Math.floor(time / 1000) % 2 ** 32);
    if (Number.isNaN(time)) continue;
    read++;
    if (time < previous) backward++;
    previous = time;
  }
  return { read, backward, print };
}
