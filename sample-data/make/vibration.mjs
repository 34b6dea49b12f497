/** Velocity of a pump bearing, 128 rows a second for ten minutes, in two files, the first one gzip. */
import { iso, Places, Random } from "./random.mjs";

const SEED = 20310304;
const START_ms = Date.UTC(2031, 2, 4, 9);
const RATE_Hz = 128;
const ROWS = RATE_Hz * 600;
const FILE_ROWS = RATE_Hz * 300;
const KEPT_RATE_Hz = 16;

const SIGNAL = {
  offset_mm_s: 0.15,
  drift_mm_s_per_min: 0.04,
  shaft: { frequency_Hz: 5, amplitude_mm_s: 0.35 },
  hum: { frequency_Hz: 50, amplitude_mm_s: 0.8 },
  second_hum: { frequency_Hz: 100, amplitude_mm_s: 0.12 },
  valve: { at_s: 432.5, frequency_Hz: 3.2, amplitude_mm_s: 1.5, decay_s: 0.8 },
  noise_rms_mm_s: 0.08,
  quantisation_step_mm_s: 0.001,
};
const LOST = [
  [9_001, 1],
  [25_600, 512],
  [61_234, 1],
];

/** Where f shows when it is sampled at a rate: f - n * rate for the nearest whole n (Shannon, 1949). */
const shownAt = (f, rate) => Math.abs(f - rate * Math.round(f / rate));

export function makeVibration() {
  const random = new Random(SEED);
  const { shaft, hum, second_hum, valve } = SIGNAL;
  const sine = ({ frequency_Hz, amplitude_mm_s }, t, phase) =>
    amplitude_mm_s * Math.sin(2 * Math.PI * frequency_Hz * t + phase);
  const rows = Array.from({ length: ROWS }, (_, k) => {
    const t = k / RATE_Hz;
    const since = t - valve.at_s;
    const value =
      SIGNAL.offset_mm_s +
      SIGNAL.drift_mm_s_per_min * (t / 60) +
      sine(shaft, t, 0.4) +
      sine(hum, t, 1.1) +
      sine(second_hum, t, 2) +
      (since < 0 ? 0 : Math.exp(-since / valve.decay_s) * sine(valve, since, 0)) +
      SIGNAL.noise_rms_mm_s * random.gaussian();
    return { ms: START_ms + Math.round(1000 * t), value: value.toFixed(3) };
  });

  const places = new Places(random, ROWS, 4 * RATE_Hz);
  places.reserve(FILE_ROWS, 1);
  places.reserve(Math.floor(valve.at_s * RATE_Hz), 8 * RATE_Hz);
  for (const [first, count] of LOST) places.reserve(first, count);
  const codes = places.pick(3);
  const duplicates = new Set(places.pick(3));
  for (const k of codes) rows[k].value = "NAN";
  const lost = new Uint8Array(ROWS);
  for (const [first, count] of LOST) lost.fill(1, first, first + count);

  const files = new Map();
  for (let k = 0; k < ROWS; k++) {
    if (lost[k] === 1) continue;
    const file = k < FILE_ROWS ? "thurnwick/vibration-0900.csv.gz" : "thurnwick/vibration-0905.csv";
    if (!files.has(file)) files.set(file, ["unix_ms,BEARING_MM_S"]);
    const line = `${rows[k].ms},${rows[k].value}`;
    files.get(file).push(line);
    if (duplicates.has(k)) files.get(file).push(line);
  }
  const lostRows = LOST.reduce((sum, [, count]) => sum + count, 0);
  return {
    files: new Map([...files].map(([name, lines]) => [name, `${lines.join("\n")}\n`])),
    truth: {
      columns: { unix_ms: "milliseconds since 1970-01-01T00:00:00Z", BEARING_MM_S: "mm/s" },
      seed: SEED,
      clock: { start: iso(START_ms), rate_Hz: RATE_Hz, drift_ppm: 0, stamps: "rounded to 1 ms" },
      bearing: { ...SIGNAL, valve: { ...valve, at: iso(START_ms + 1000 * valve.at_s) } },
      folds: {
        second_hum_in_the_logger: { from_Hz: 100, rate_Hz: RATE_Hz, shows_at_Hz: shownAt(100, RATE_Hz) },
        hum_if_every_8th_is_kept: {
          from_Hz: 50,
          rate_Hz: KEPT_RATE_Hz,
          lands_at_Hz: shownAt(50, KEPT_RATE_Hz),
        },
        second_hum_if_every_8th_is_kept: {
          from_Hz: 28,
          rate_Hz: KEPT_RATE_Hz,
          lands_at_Hz: shownAt(28, KEPT_RATE_Hz),
        },
      },
      rows: {
        scheduled: ROWS,
        lost: lostRows,
        late: 0,
        exact_duplicates: duplicates.size,
        same_time_other_value: 0,
        written: ROWS - lostRows + duplicates.size,
      },
      gaps: LOST.map(([first, count]) => ({
        lost_rows: count,
        from: iso(rows[first - 1].ms),
        to: iso(rows[first + count].ms),
      })),
      missing: { BEARING_MM_S: { NAN: codes.length } },
    },
  };
}
