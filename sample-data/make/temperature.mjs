/** Water temperature at the intake, a row a minute for 30 days. */
import { iso, Places, Random } from "./random.mjs";

const SEED = 20310201;
const START_s = Date.UTC(2031, 1, 1, 0, 0, 7) / 1000;
const INTERVAL_s = 60;
const ROWS = 43_200;
const DRIFT_ppm = 12;
const SPAN_s = 30 * 86_400;

const SIGNAL = {
  mean_degC: 8,
  /** Of x = time since the start / 30 d: linear, quadratic. */
  drift_degC: { x: 0.8, x2: 1.2 },
  daily: { period_s: 86_400, amplitude_degC: 1.5 },
  half_daily: { period_s: 43_200, amplitude_degC: 0.3 },
  heater: { period_s: 19 * 60, amplitude_degC: 0.1 },
  noise_rms_degC: 0.03,
  quantisation_step_degC: 0.01,
};
const LOST = [
  [12_950, 40],
  [27_300, 300],
];
const STEP = { row: 27_600, height_degC: -0.6 };

export function makeTemperature() {
  const random = new Random(SEED);
  const sine = ({ period_s, amplitude_degC }, t, phase) =>
    amplitude_degC * Math.sin((2 * Math.PI * t) / period_s + phase);
  const rows = Array.from({ length: ROWS }, (_, k) => {
    const s = Math.round(START_s + INTERVAL_s * k * (1 + DRIFT_ppm * 1e-6));
    const t = s - START_s;
    const x = t / SPAN_s;
    const value =
      SIGNAL.mean_degC +
      SIGNAL.drift_degC.x * x +
      SIGNAL.drift_degC.x2 * x * x +
      sine(SIGNAL.daily, t, -2.2) +
      sine(SIGNAL.half_daily, t, 0.5) +
      sine(SIGNAL.heater, t, 0) +
      (k >= STEP.row ? STEP.height_degC : 0) +
      SIGNAL.noise_rms_degC * random.gaussian();
    return { s, value: value.toFixed(2) };
  });

  const places = new Places(random, ROWS, 60);
  for (const [first, count] of LOST) places.reserve(first, count);
  const blanks = places.pick(80);
  const nans = places.pick(40);
  const runs = places.pick(10, 12).map((first) => ({ first, rows: random.whole(5, 12) }));
  for (const k of blanks) rows[k].value = "";
  for (const k of nans) rows[k].value = "NAN";
  for (const run of runs) for (let i = 0; i < run.rows; i++) rows[run.first + i].value = "";
  const lost = new Uint8Array(ROWS);
  for (const [first, count] of LOST) lost.fill(1, first, first + count);
  const written = rows.filter((_, k) => lost[k] === 0);
  return {
    files: new Map([
      [
        "thurnwick/temperature.csv",
        `unix_s,WATER_C\n${written.map(({ s, value }) => `${s},${value}\n`).join("")}`,
      ],
    ]),
    truth: {
      columns: { unix_s: "seconds since 1970-01-01T00:00:00Z", WATER_C: "degC" },
      seed: SEED,
      clock: {
        start: iso(START_s * 1000),
        interval_s: INTERVAL_s,
        drift_ppm: DRIFT_ppm,
        stamps: "rounded to 1 s",
      },
      water: {
        ...SIGNAL,
        jump: { at: iso(rows[STEP.row].s * 1000), height_degC: STEP.height_degC },
      },
      folds: {
        heater_if_every_60th_is_kept: { from_period_min: 19, interval_min: 60, lands_at_period_min: 380 },
      },
      rows: {
        scheduled: ROWS,
        lost: ROWS - written.length,
        late: 0,
        exact_duplicates: 0,
        same_time_other_value: 0,
        written: written.length,
      },
      gaps: LOST.map(([first, count]) => ({
        lost_rows: count,
        from: iso(rows[first - 1].s * 1000),
        to: iso(rows[first + count].s * 1000),
      })),
      missing: {
        WATER_C: { "": blanks.length + runs.reduce((sum, r) => sum + r.rows, 0), NAN: nans.length },
      },
    },
  };
}
