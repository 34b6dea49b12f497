/**
 * `calibrate`: turns raw values into true ones by a polynomial, a table or an offset, row by row.
 * Polynomials are evaluated by Horner's scheme. A table is never extrapolated.
 */
import type { z } from "zod";
import { finite, list, stageSettings, text } from "../pipeline/kinds.ts";
import { SCREENED } from "../signal/marks.ts";
import { RowFindings } from "./parts/row-findings.ts";
import { type Stretch, stretchOf, stretchSettings, stretchText } from "./parts/stretch.ts";
import type {
  DesignOutcome,
  Problem,
  RowStageDesign,
  RowStageKernel,
  Signal,
  SignalChannel,
  Stage,
} from "./stage.ts";

const SENSOR_RANGE = "sensor-range";
const OUTSIDE_TABLE = "outside-table";
const NOT_FINITE = "not-finite";

const settings = stageSettings("calibrate", {
  polynomial: list(finite({ about: "A coefficient." }), {
    min: 1,
    max: 12,
    about: "Coefficients a0, a1, a2 and so on: true value = a0 + a1 raw + a2 raw² …, each in its unit.",
  }).optional(),
  table: list(list(finite({ about: "A number." }), { min: 2, max: 2, about: "Raw value and true value." }), {
    min: 2,
    max: 10_000,
    about:
      "Points [raw, true] by rising raw value, joined by straight lines; a value outside them is rejected, never extrapolated.",
  }).optional(),
  offset: finite({
    about: "Added to the true value, in its unit: a re-zero in the field. It may stand alone.",
  }).optional(),
  unit: text({
    about: "Unit of the true values, for every later stage and label; as before when left out.",
    example: "m",
    line: true,
    longest: 40,
  }).optional(),
  "sensor-range": list(finite({ about: "A raw value." }), {
    min: 2,
    max: 2,
    about: "Lowest and highest raw value that the sensor can give; a value outside is rejected.",
  }).optional(),
  ...stretchSettings,
});
type Settings = z.output<typeof settings>;

function design(s: Settings, signal: Signal, selected: readonly number[]): DesignOutcome<RowStageDesign> {
  const problems: Problem[] = [];
  const wrong = (path: string[], p: Omit<Problem, "severity" | "path">) =>
    problems.push({ severity: "error", path, ...p });
  if (s.polynomial !== undefined && s.table !== undefined)
    wrong(["table"], {
      code: "calibrate-twice",
      problem: "a value is calibrated in one way",
      given: "both polynomial and table",
      allowed: "one of polynomial, table",
      todo: "keep one of them",
    });
  if (s.polynomial === undefined && s.table === undefined && s.offset === undefined)
    wrong([], {
      code: "calibrate-nothing",
      problem: "nothing says how raw values become true ones",
      given: "none of polynomial, table, offset",
      allowed: "polynomial or table, or offset alone",
      todo: "add for instance polynomial: [0, 0.001]",
    });
  const bad = (s.table ?? []).findIndex(([raw], i, all) => i > 0 && !(raw! > all[i - 1]![0]!));
  if (bad > 0)
    wrong(["table"], {
      code: "table-order",
      problem: "the raw values of a table rise from point to point",
      given: `${s.table![bad]![0]} after ${s.table![bad - 1]![0]}`,
      allowed: "each raw value once, the lowest first",
      todo: "put the points in order of their raw values, and take out repeated ones",
    });
  const [low, high] = s["sensor-range"] ?? [Number.NEGATIVE_INFINITY, Number.POSITIVE_INFINITY];
  if (!(low! < high!))
    wrong(["sensor-range"], {
      code: "empty-range",
      problem: "the sensor range is empty",
      given: `${low} to ${high}`,
      allowed: "the lower value first",
      todo: "swap them, or correct one of them",
    });
  const stretch = stretchOf(s, problems);
  const channels = signal.channels.map((channel, c) =>
    selected.includes(c) ? converted(channel, s, stretch, problems) : channel,
  );
  if (problems.length > 0) return { design: null, problems };
  const how = [
    ...(s.polynomial === undefined ? [] : [`a polynomial of degree ${s.polynomial.length - 1}`]),
    ...(s.table === undefined ? [] : [`a table of ${s.table.length} points`]),
    ...(s.offset === undefined ? [] : [`an offset of ${s.offset}`]),
  ];
  const names = selected.map((c) => signal.channels[c]!.name).join(", ");
  const reasons = [SENSOR_RANGE, OUTSIDE_TABLE, NOT_FINITE];
  return {
    problems,
    design: {
      says: `Calibrated ${names} by ${how.join(" and ")}${s.unit === undefined ? "" : `, to ${s.unit}`}${stretchText(s)}.`,
      settings: {
        ...(s.polynomial === undefined ? {} : { polynomial: s.polynomial }),
        ...(s.table === undefined ? {} : { table: s.table }),
        ...(s.offset === undefined ? {} : { offset: s.offset }),
        unit: s.unit ?? null,
        "sensor-range": s["sensor-range"] ?? null,
        from: s.from?.text ?? null,
        until: s.until?.text ?? null,
      },
      channels,
      reach_s: { before: 0, after: 0 },
      notes: {
        channels: Object.fromEntries(
          selected.map((c) => [
            signal.channels[c]!.name,
            {
              unit_in: signal.channels[c]!.unit,
              unit_out: s.unit ?? signal.channels[c]!.unit,
            },
          ]),
        ),
      },
      rowStage: () => new Calibration(curveOf(s), low!, high!, stretch, selected, reasons),
    },
  };
}

/** The channel as it leaves: in the new unit once all times have been converted. */
function converted(
  channel: SignalChannel,
  s: Settings,
  stretch: Stretch,
  problems: Problem[],
): SignalChannel {
  const whole = !Number.isFinite(stretch.from_us) && !Number.isFinite(stretch.until_us);
  const begun = channel.converting;
  const target = s.unit ?? (begun === undefined ? channel.unit : undefined);
  if (begun !== undefined && (target !== begun.unit || overlaps(begun.spans, stretch))) {
    problems.push({
      code: "calibrate-again",
      severity: "error",
      path: [],
      problem: `channel ${channel.name} is in ${begun.unit} for part of the time already`,
      given: `${target === undefined ? "no unit" : `unit ${target}`}${stretchText(s)}`,
      allowed: `unit ${begun.unit}, for times that no calibrate stage above has taken`,
      todo: "let the stages' times follow each other: until of one is from of the next, all with the same unit",
    });
    return channel;
  }
  const { converting: _, ...bare } = channel;
  if (target === undefined || target === channel.unit) return channel;
  if (whole) return { ...bare, unit: target };
  const spans = joined([...(begun?.spans ?? []), stretch]);
  const all =
    spans.length === 1 && !Number.isFinite(spans[0]!.from_us) && !Number.isFinite(spans[0]!.until_us);
  return all ? { ...bare, unit: target } : { ...bare, converting: { unit: target, spans } };
}

const overlaps = (spans: readonly Stretch[], { from_us, until_us }: Stretch): boolean =>
  spans.some((span) => span.from_us < until_us && from_us < span.until_us);

/** Stretches in order of time, those that touch made one. */
function joined(spans: readonly Stretch[]): Stretch[] {
  const out: Stretch[] = [];
  for (const span of [...spans].sort((a, b) => a.from_us - b.from_us)) {
    const last = out.at(-1);
    if (last !== undefined && last.until_us === span.from_us)
      out[out.length - 1] = { from_us: last.from_us, until_us: span.until_us };
    else out.push(span);
  }
  return out;
}

/** True value of a raw one; NaN outside a table. */
function curveOf(s: Settings): (raw: number) => number {
  const offset = s.offset ?? 0;
  if (s.polynomial !== undefined) {
    const a = s.polynomial;
    return (raw) => {
      let y = a[a.length - 1]!;
      for (let n = a.length - 2; n >= 0; n--) y = y * raw + a[n]!;
      return y + offset;
    };
  }
  if (s.table === undefined) return (raw) => raw + offset;
  const x = Float64Array.from(s.table, (p) => p[0]!);
  const y = Float64Array.from(s.table, (p) => p[1]!);
  const last = x.length - 1;
  return (raw) => {
    if (!(raw >= x[0]! && raw <= x[last]!)) return Number.NaN;
    let low = 0;
    let high = last - 1;
    while (low < high) {
      const middle = (low + high + 1) >>> 1;
      if (x[middle]! <= raw) low = middle;
      else high = middle - 1;
    }
    if (raw === x[low + 1]!) return y[low + 1]! + offset;
    return y[low]! + ((y[low + 1]! - y[low]!) * (raw - x[low]!)) / (x[low + 1]! - x[low]!) + offset;
  };
}

class Calibration implements RowStageKernel {
  private readonly curve: (raw: number) => number;
  private readonly low: number;
  private readonly high: number;
  private readonly stretch: Stretch;
  private readonly books: ReadonlyMap<number, Book>;

  constructor(
    curve: (raw: number) => number,
    low: number,
    high: number,
    stretch: Stretch,
    selected: readonly number[],
    reasons: readonly string[],
  ) {
    this.curve = curve;
    this.low = low;
    this.high = high;
    this.stretch = stretch;
    this.books = new Map(selected.map((c) => [c, new Book(reasons)]));
  }

  push: RowStageKernel["push"] = (block, emit) => {
    const { count, times } = block;
    const columns = [...block.columns];
    const marks = [...block.marks];
    for (const [c, book] of this.books) {
      const column = columns[c]!.slice(0, count);
      const mark = marks[c]!.slice(0, count);
      for (let i = 0; i < count; i++) {
        const t = times[i]!;
        const raw = column[i]!;
        if (Number.isNaN(raw) || t < this.stretch.from_us || t >= this.stretch.until_us) continue;
        const inRange = raw >= this.low && raw <= this.high;
        const value = inRange ? this.curve(raw) : Number.NaN;
        if (Number.isFinite(value)) column[i] = value;
        else {
          column[i] = Number.NaN;
          mark[i] = SCREENED;
          const reason = !inRange ? SENSOR_RANGE : Number.isNaN(value) ? OUTSIDE_TABLE : NOT_FINITE;
          book.findings.reject(t, raw, reason);
        }
        book.note(raw, value);
      }
      columns[c] = column;
      marks[c] = mark;
    }
    emit({ count, times, columns, marks });
  };

  flush(): void {}

  effect: RowStageKernel["effect"] = (channel) => this.books.get(channel)?.effect() ?? new Book([]).effect();
}

/** What calibration did to one channel. */
class Book {
  readonly findings: RowFindings;
  private rows = 0;
  private changed = 0;
  private readonly before = [Number.POSITIVE_INFINITY, Number.NEGATIVE_INFINITY];
  private readonly after = [Number.POSITIVE_INFINITY, Number.NEGATIVE_INFINITY];

  constructor(reasons: readonly string[]) {
    this.findings = new RowFindings({ rejected: reasons, suspect: [] });
  }

  note(raw: number, value: number): void {
    this.rows++;
    widen(this.before, raw);
    if (!Number.isFinite(value)) return;
    if (value !== raw) this.changed++;
    widen(this.after, value);
  }

  effect() {
    const range = (r: readonly number[]) => (r[0]! > r[1]! ? null : [...r]);
    return this.findings.effect({
      rows_calibrated: this.rows,
      rows_changed: this.changed,
      range_before: range(this.before),
      range_after: range(this.after),
    });
  }
}

function widen(range: number[], value: number): void {
  if (value < range[0]!) range[0] = value;
  if (value > range[1]!) range[1] = value;
}

export const calibrate: Stage<typeof settings, RowStageDesign> = {
  name: "calibrate",
  about: "Turns raw values into true ones by a polynomial, a table or an offset, and sets their unit.",
  settings,
  worksOn: "rows",
  design,
};
