/** Level and inflow of the gallery, a row a second for 22 hours, in two daily files. */
import { iso, Places, Random, rms } from "./random.mjs";

const SEED = 20310303;
const START_ms = Date.UTC(2031, 2, 3, 16);
const ROWS = 79_200;
const INTERVAL_s = 1;
const DRIFT_ppm = 35;
const JITTER_ms = 6;

const LEVEL = {
  mean_m: 6,
  pumping: { period_s: 7200, amplitude_m: 0.3 },
  tide: { period_s: 44_712, amplitude_m: 0.18, phase_rad: 0.7 },
  seiche: { frequency_Hz: 0.004, amplitude_m: 0.004 },
  slosh: { frequency_Hz: 0.3, rms_m: 0.03, pole_radius: 0.98 },
  sensor_drift_mm_per_day: 5,
  noise_rms_m: 0.001,
  quantisation_step_m: 0.001,
};
const INFLOW = { mean_m3s: 3.2, pumping: { period_s: 7200, amplitude_m3s: 0.9 }, noise_rms_m3s: 0.05 };

/** Rows that were never written: [first row lost, how many]. */
const LOST = [
  [2_100, 3],
  [7_450, 7],
  [11_000, 1200],
  [24_300, 3],
  [32_000, 120],
  [41_777, 3],
  [50_400, 25],
  [58_210, 7],
  [70_003, 3],
];
const LEVEL_CODE_RUN = { first: 65_000, rows: 40, code: "-9999" };
const LEVEL_NAN_RUN = { first: 18_500, rows: 8, code: "NAN" };
const INFLOW_CODE_RUN = { first: 21_600, rows: 90, code: "-9999" };

/** Narrow-band noise: a second-order autoregression whose pole pair stands at the frequency. */
function slosh(random, count) {
  const { frequency_Hz, rms_m, pole_radius: r } = LEVEL.slosh;
  const a1 = 2 * r * Math.cos(2 * Math.PI * frequency_Hz);
  const a2 = -r * r;
  // Variance of the process for a driving noise of 1 (Box and Jenkins, 1970).
  const variance = (1 - a2) / ((1 + a2) * ((1 - a2) ** 2 - a1 ** 2));
  const drive = rms_m / Math.sqrt(variance);
  const out = new Float64Array(count);
  let y1 = 0;
  let y2 = 0;
  for (let k = -1000; k < count; k++) {
    const y = a1 * y1 + a2 * y2 + drive * random.gaussian();
    y2 = y1;
    y1 = y;
    if (k >= 0) out[k] = y;
  }
  return out;
}

export function makeLevel() {
  const random = new Random(SEED);
  const waves = slosh(random, ROWS);
  const sine = (t, frequency, phase = 0) => Math.sin(2 * Math.PI * frequency * t + phase);
  const rows = Array.from({ length: ROWS }, (_, k) => {
    const jitter = Math.max(-40, Math.min(40, JITTER_ms * random.gaussian()));
    const ms = Math.round(START_ms + 1000 * INTERVAL_s * k * (1 + DRIFT_ppm * 1e-6) + jitter);
    const t = (ms - START_ms) / 1000;
    const { pumping, tide, seiche } = LEVEL;
    const level =
      LEVEL.mean_m +
      pumping.amplitude_m * sine(t, 1 / pumping.period_s) +
      tide.amplitude_m * sine(t, 1 / tide.period_s, tide.phase_rad) +
      seiche.amplitude_m * sine(t, seiche.frequency_Hz) +
      waves[k] +
      (LEVEL.sensor_drift_mm_per_day / 1000) * (t / 86_400) +
      LEVEL.noise_rms_m * random.gaussian();
    const inflow =
      INFLOW.mean_m3s +
      INFLOW.pumping.amplitude_m3s * sine(t, 1 / INFLOW.pumping.period_s, Math.PI / 2) +
      INFLOW.noise_rms_m3s * random.gaussian();
    return { ms, level: level.toFixed(3), inflow: inflow.toFixed(2) };
  });

  const places = new Places(random, ROWS, 12);
  places.reserve(8 * 3600, 4); // midnight: keep the change of file plain
  for (const [first, count] of LOST) places.reserve(first, count);
  for (const run of [LEVEL_CODE_RUN, LEVEL_NAN_RUN, INFLOW_CODE_RUN]) places.reserve(run.first, run.rows);
  const levelCodes = places.pick(40);
  const levelNans = places.pick(20);
  const inflowBlanks = places.pick(30);
  const inflowNans = places.pick(15);
  const duplicates = new Set(places.pick(25));
  const conflicts = new Set(places.pick(4));
  const late = new Map(places.pick(6).map((k) => [k, random.whole(2, 8)]));

  const mark = (list, column, code) => {
    for (const k of list) rows[k][column] = code;
  };
  const run = ({ first, rows: count }) => Array.from({ length: count }, (_, i) => first + i);
  mark([...levelCodes, ...run(LEVEL_CODE_RUN)], "level", "-9999");
  mark([...levelNans, ...run(LEVEL_NAN_RUN)], "level", "NAN");
  mark(inflowBlanks, "inflow", "");
  mark(inflowNans, "inflow", "NAN");
  mark(run(INFLOW_CODE_RUN), "inflow", "-9999");

  const lost = new Uint8Array(ROWS);
  for (const [first, count] of LOST) lost.fill(1, first, first + count);
  const files = new Map();
  const marked = { exact_duplicates: [], same_time_other_value: [], late: [] };
  const write = (k, kind, cells = rows[k]) => {
    const file = `thurnwick/level-${iso(cells.ms).slice(0, 10)}.csv`;
    if (!files.has(file)) files.set(file, ["logged_at,LEVEL_M,INFLOW_M3S"]);
    const lines = files.get(file);
    lines.push(`${iso(cells.ms)},${cells.level},${cells.inflow}`);
    if (kind !== undefined) marked[kind].push({ file, line: lines.length });
  };
  const held = new Map();
  for (let k = 0; k < ROWS; k++) {
    if (lost[k] === 1) continue;
    if (late.has(k)) held.set(k + late.get(k), k);
    else write(k);
    if (duplicates.has(k)) write(k, "exact_duplicates");
    if (conflicts.has(k)) {
      const other = (Number(rows[k].level) + 0.013).toFixed(3);
      write(k, "same_time_other_value", { ...rows[k], level: other });
    }
    if (held.has(k)) write(held.get(k), "late");
  }

  const lostRows = LOST.reduce((sum, [, count]) => sum + count, 0);
  return {
    files: new Map([...files].map(([name, lines]) => [name, `${lines.join("\n")}\n`])),
    truth: {
      columns: { logged_at: "ISO 8601 with Z", LEVEL_M: "m", INFLOW_M3S: "m3/s" },
      seed: SEED,
      clock: { start: iso(START_ms), interval_s: INTERVAL_s, drift_ppm: DRIFT_ppm, jitter_sd_ms: JITTER_ms },
      level: { ...LEVEL, slosh: { ...LEVEL.slosh, rms_drawn_m: Number(rms(waves).toFixed(5)) } },
      inflow: { ...INFLOW, quantisation_step_m3s: 0.01 },
      rows: {
        scheduled: ROWS,
        lost: lostRows,
        late: late.size,
        exact_duplicates: duplicates.size,
        same_time_other_value: conflicts.size,
        written: ROWS - lostRows + duplicates.size + conflicts.size,
      },
      gaps: LOST.map(([first, count]) => ({
        lost_rows: count,
        from: iso(rows[first - 1].ms),
        to: iso(rows[first + count].ms),
      })),
      missing: {
        LEVEL_M: {
          "-9999": levelCodes.length + LEVEL_CODE_RUN.rows,
          NAN: levelNans.length + LEVEL_NAN_RUN.rows,
        },
        INFLOW_M3S: { "": inflowBlanks.length, NAN: inflowNans.length, "-9999": INFLOW_CODE_RUN.rows },
      },
      missing_runs: [
        { column: "LEVEL_M", code: "NAN", rows: LEVEL_NAN_RUN.rows, from: iso(rows[LEVEL_NAN_RUN.first].ms) },
        {
          column: "INFLOW_M3S",
          code: "-9999",
          rows: INFLOW_CODE_RUN.rows,
          from: iso(rows[INFLOW_CODE_RUN.first].ms),
        },
        {
          column: "LEVEL_M",
          code: "-9999",
          rows: LEVEL_CODE_RUN.rows,
          from: iso(rows[LEVEL_CODE_RUN.first].ms),
        },
      ],
      lines: marked,
    },
  };
}
