// `npm run bench`: wall time and peak resident set of one clean, for a record and one with ten times the rows.
// Figures are for this machine and this moment; compare ratios, not seconds.
import { spawnSync } from "node:child_process";
import {
  closeSync,
  mkdtempSync,
  openSync,
  readFileSync,
  rmSync,
  statSync,
  writeFileSync,
  writeSync,
} from "node:fs";
import { tmpdir } from "node:os";
import { dirname, join } from "node:path";
import { fileURLToPath } from "node:url";

const here = dirname(fileURLToPath(import.meta.url));
const root = join(here, "..", "..");
const place = mkdtempSync(join(tmpdir(), "forebay-bench-"));
const small = Number(process.argv[2] ?? 400_000);

/** Ten rows a second, three channels; a Lehmer generator, so the log is the same everywhere. */
function makeLog(path, rows) {
  const handle = openSync(path, "w");
  let n = 12345;
  const noise = () => (n = (n * 16807) % 2147483647) / 2147483647 - 0.5;
  let text = "t_ms,A,B,C\n";
  for (let i = 0; i < rows; i++) {
    if (i % 5000 < 3) continue;
    const a = Math.sin(i / 4000) + 0.1 * noise();
    text += `${1_900_000_000_000 + i * 100},${a.toFixed(5)},${(2 * a + 0.2 * noise()).toFixed(4)},${(100 + noise()).toFixed(3)}\n`;
    if (text.length > 1 << 20) {
      writeSync(handle, text);
      text = "";
    }
  }
  writeSync(handle, text);
  closeSync(handle);
}

const pipeline = `
name: bench
logs: { files: log.csv, time: { column: t_ms, form: unix-ms } }
channels: { a: { column: A, unit: m }, b: { column: B, unit: m }, c: { column: C, unit: m } }
chain:
  - { stage: resample, interval: 100 ms, longest-gap: 1 s }
  - { stage: detrend, degree: 1 }
  - { stage: fir, shape: low-pass, taps: 201, edge: 0.4 Hz }
  - { stage: decimate, by: 10 }
  - { stage: report }
writes: { folder: out, removed: true, digits: 6 }
`;

const runs = [];
for (const rows of [small, 10 * small]) {
  makeLog(join(place, "log.csv"), rows);
  writeFileSync(join(place, "bench.yaml"), pipeline);
  const peakFile = join(place, "peak");
  const started = performance.now();
  const run = spawnSync(
    process.execPath,
    [
      "--import",
      join(here, "report-peak.mjs"),
      join(root, "dist", "bin.js"),
      "clean",
      join(place, "bench.yaml"),
      "--quiet",
    ],
    { env: { ...process.env, PEAK_FILE: peakFile }, encoding: "utf8" },
  );
  const wall_s = (performance.now() - started) / 1000;
  if (run.status !== 0) throw new Error(`clean ended with ${run.status}: ${run.stderr}`);
  runs.push({
    rows,
    MB: statSync(join(place, "log.csv")).size / 1e6,
    wall_s,
    peak_MB: Number(readFileSync(peakFile, "utf8")) / 1024,
  });
}
rmSync(place, { recursive: true, force: true });

console.log("rows        log MB   wall s   MB/s   peak MB");
for (const r of runs)
  console.log(
    `${String(r.rows).padEnd(10)} ${r.MB.toFixed(1).padStart(7)} ${r.wall_s.toFixed(2).padStart(8)} ${(r.MB / r.wall_s).toFixed(1).padStart(6)} ${r.peak_MB.toFixed(1).padStart(9)}`,
  );
console.log(
  `ten times the rows: ${(runs[1].wall_s / runs[0].wall_s).toFixed(2)} times the time, ${(runs[1].peak_MB / runs[0].peak_MB).toFixed(3)} times the peak`,
);
