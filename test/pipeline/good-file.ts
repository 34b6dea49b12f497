/** A good pipeline file, and how a mistake is put into it. */

export const GOOD = `name: sump-level
about: Level in the sump.
logs:
  files: ../logs/{logger}/level-{date}.csv
  time:
    column: logged_at
    form: iso-8601
    zone: UTC
  missing: ["NAN", "-9999", -7]
  layout: { separator: ";", decimal-sign: ",", names-line: 1, data-from-line: 3 }
  settled: 5 min
  late-by: 1 min
channels:
  level: { column: LEVEL_M, unit: m }
  inflow: { column: Q_IN, unit: m3/s }
chain:
  - stage: even
    interval: 1/4 s
    anchor: 2031-03-04T00:00:00Z
  - stage: smooth
    channels: [level]
    points: 5
    over: whole
    share: 80 %
    drift: -20 ppm
    slope: 0.5 m/s
    weights: [1, 2.5, 1]
    spike: { over: 31 s, deviations: 6 }
  - stage: cut
    shape: low-pass
    pass: [2 mHz, 10 min]
    floor: -80 dB
    to: 100 Hz
  - stage: tell
    bands:
      tide: { from: 0 Hz, to: 0.1 mHz }
requirements:
  keep: [{ from: 0 Hz, to: 2 mHz, ripple: 0.1 dB }]
  remove:
    - { from: 0.1 Hz, to: 0.5 Hz, attenuation: 40 dB }
  delay: 0 s
writes:
  folder: ../cleaned/{logger}
  digits: 6
  removed: true
`;

export interface MistakeCase {
  readonly code: string;
  /** Text of the good file, which must be in it. */
  readonly replace: string;
  /** What stands there instead; § marks the place that the diagnostic must name. */
  readonly by: string;
  /** Whether a JSON Schema can see it; true when left out. */
  readonly schema?: false;
  /** Part of what must be said. */
  readonly says?: string;
}

/** The file with the mistake in it, and the place where it must be found. */
export function withMistake(c: MistakeCase): { text: string; line: number; column: number } {
  const at = GOOD.indexOf(c.replace);
  if (at < 0) throw new Error(`the good file has no ${c.replace}`);
  const marked = GOOD.slice(0, at) + c.by + GOOD.slice(at + c.replace.length);
  const before = marked.slice(0, marked.indexOf("§")).split("\n");
  if (marked.split("§").length !== 2) throw new Error(`one mark is needed in ${c.by}`);
  return { text: marked.replace("§", ""), line: before.length, column: before.at(-1)!.length + 1 };
}
