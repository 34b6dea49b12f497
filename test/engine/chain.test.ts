import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { wholeAccount } from "../../src/report/channel-account.ts";
import { measuredDelay } from "../../src/report/measured-delay.ts";
import { chainDelay } from "../../src/report/requirements.ts";
import { densities } from "../../src/report/spectrum-account.ts";
import { intervalSeconds, timeSince } from "../../src/signal/grid.ts";
import { FILLED } from "../../src/signal/marks.ts";
import { type Entry, evenRows, planOf, run } from "./harness.ts";

const RESAMPLE: Entry = { stage: "resample", interval: "1 s" };
const REPORT: Entry = { stage: "report" };

const CHAINS: Record<string, Entry[]> = {
  "nothing but the grid": [RESAMPLE],
  "centred mean": [RESAMPLE, { stage: "moving-average", points: 31 }, REPORT],
  "even centred mean": [RESAMPLE, { stage: "moving-average", points: 30 }, REPORT],
  "trailing mean": [RESAMPLE, { stage: "moving-average", points: 31, reach: "past-only" }, REPORT],
  "even trailing mean": [RESAMPLE, { stage: "moving-average", points: 30, reach: "past-only" }, REPORT],
  "mean, then every tenth": [
    RESAMPLE,
    { stage: "moving-average", points: 11 },
    { stage: "decimate", by: 10 },
    REPORT,
  ],
  "trailing filter, every fourth, trend": [
    RESAMPLE,
    { stage: "fir", shape: "low-pass", pass: "0.05 Hz", stop: "0.15 Hz", reach: "past-only" },
    { stage: "decimate", by: 4, "anti-alias": "upstream" },
    { stage: "detrend", degree: 1, over: "100 s" },
    REPORT,
  ],
  "trend over all, high-pass": [
    RESAMPLE,
    { stage: "detrend", degree: 2 },
    { stage: "fir", shape: "high-pass", taps: 41, edge: "0.1 Hz" },
    REPORT,
  ],
};

/** A record with waves, a drift, gaps and holes; reproducible without a random generator. */
function roughRecord(n: number) {
  const times: number[] = [];
  const values: number[] = [];
  for (let i = 0; i < n; i++) {
    if (i % 97 === 40 || (i > 200 && i < 230)) continue;
    times.push(i * 1_000_000 + ((i * 7919) % 301) - 150 + 1_000_000_000);
    values.push(i % 131 === 60 ? Number.NaN : 5 + 0.01 * i + Math.sin(i / 9) + 0.3 * Math.sin(i * 2.1));
  }
  return { times, columns: [values] };
}

describe("impulse", () => {
  for (const [name, chain] of Object.entries(CHAINS)) {
    if (chain.some((s) => s.stage === "detrend" || s.shape === "high-pass")) continue;
    it(`lands where the account says, to a microsecond: ${name}`, () => {
      const plan = planOf(chain);
      const n = 4001;
      const at = 2000;
      const x = new Float64Array(n);
      x[at] = 1;
      const { clean, first } = run(plan, evenRows(x, 1_000_000));
      const y = clean[0]!;
      let weight = 0;
      let moment = 0;
      y.forEach((v, i) => {
        if (Number.isNaN(v)) return;
        weight += v;
        moment += v * timeSince(plan.outGrid, first + i, at * 1_000_000);
      });
      // The centre of gravity of the answer; after decimation it is sampled, and exact for a band-limited answer.
      const delay_us = moment / weight;
      const decimated = plan.outGrid.stride !== plan.gridStage.design.grid.stride;
      expect(Math.abs(delay_us - chainDelay(plan) * 1e6)).toBeLessThan(decimated ? 2e3 : 1);
    });
  }
});

describe("cut up", () => {
  for (const [name, chain] of Object.entries(CHAINS))
    it(`gives the same bits for any block size: ${name}`, () => {
      const plan = planOf(chain);
      const record = roughRecord(1500);
      const removed = chain.length > 1 && !name.includes("even");
      const whole = run(plan, record, { blockRows: 65_536, removed });
      const facts = (r: typeof whole) =>
        r.results.map((c) =>
          c.measures.map((m) => ({
            sums: m.comparison?.sums.figures(),
            counts: m.counts.states(),
            xx: m.cross === null ? null : Array.from(m.cross.xx),
            rr: m.cross === null ? null : Array.from(m.cross.rr),
          })),
        );
      for (const blockRows of [1, 7, 1000]) {
        const cut = run(plan, record, { blockRows, removed });
        expect(cut.clean).toEqual(whole.clean);
        expect(cut.marks).toEqual(whole.marks);
        expect(cut.removed).toEqual(whole.removed);
        expect(facts(cut)).toEqual(facts(whole));
      }
    });
});

describe("books", () => {
  it("kept + removed = input, sample by sample", () => {
    for (const chain of [
      CHAINS["centred mean"]!,
      CHAINS["trailing mean"]!,
      CHAINS["trend over all, high-pass"]!,
    ]) {
      const plan = planOf(chain);
      const record = roughRecord(1500);
      const { clean, first, removed, removedFirst } = run(plan, record, { removed: true });
      const input = run(planOf([RESAMPLE]), record);
      const delay = Math.round(chainDelay(plan) / intervalSeconds(plan.outGrid));
      let compared = 0;
      removed[0]!.forEach((r, i) => {
        const k = removedFirst + i;
        const y = clean[0]![k + delay - first]!;
        const x = input.clean[0]![k - input.first]!;
        if (Number.isNaN(r)) {
          expect(Number.isNaN(x) || Number.isNaN(y)).toBe(true);
          return;
        }
        compared++;
        expect(Math.abs(y + r - x)).toBeLessThanOrEqual(1e-12 * Math.abs(x));
      });
      expect(compared).toBeGreaterThan(500);
    }
  });

  it("close band by band: Gxx = Gyy + Grr + 2 Re Gyr, whatever the delay", () => {
    for (const [name, chain] of Object.entries(CHAINS)) {
      const { results } = run(planOf(chain), roughRecord(3000));
      for (const m of results[0]!.measures) {
        if (m.cross === null || m.spectra === null) continue;
        const d = densities(m.spectra.plan, m.cross);
        if (d === null) continue;
        d.xx.forEach((x, k) => {
          const error = d.yy[k]! + d.rr[k]! + d.yr2[k]! - x;
          expect(Math.abs(error), `${name} bin ${k}`).toBeLessThanOrEqual(1e-9 * x + 1e-300);
        });
      }
    }
  });

  it("says nothing is removed where a filter only delays", () => {
    const taps = new Array(9).fill(0);
    taps[8] = 1;
    const chain: Entry[] = [RESAMPLE, { stage: "fir", coefficients: taps, reach: "past-only" }, REPORT];
    const { results } = run(planOf(chain), roughRecord(1500));
    const m = results[0]!.measures[0]!;
    expect(m.comparison!.sums.figures()!.varianceRemoved).toBe(0);
  });

  it("finds by cross-correlation the delay that is stated", () => {
    let n = 99;
    const noise = () => {
      n = (n * 16807) % 2147483647;
      return n / 2147483647 - 0.5;
    };
    const x = Float64Array.from({ length: 20_000 }, noise);
    for (const [name, chain] of Object.entries(CHAINS)) {
      if (chain.some((s) => s.stage === "detrend")) continue;
      const { results } = run(planOf(chain), evenRows(x, 1_000_000));
      for (const m of results[0]!.measures) {
        const delay = m.cross === null ? null : measuredDelay(m.cross);
        if (delay === null || m.planned.design.taps === null) continue;
        expect(Math.abs(delay.beyond_samples), name).toBeLessThan(0.1);
        expect(delay.correlation, name).toBeGreaterThan(0.1);
      }
    }
  });

  it("adds up over the whole chain: all stages together against their input", () => {
    for (const name of [
      "mean, then every tenth",
      "trailing filter, every fourth, trend",
      "even centred mean",
    ]) {
      const plan = planOf(CHAINS[name]!);
      const { results } = run(plan, roughRecord(3000));
      const whole = wholeAccount(plan, 0, results[0]!)!;
      expect(whole, name).not.toBeNull();
      for (const b of whole.bands) expect(Math.abs(b.closure!), name).toBeLessThan(1e-9);
      // Segments are few and the filters long beside them: as predicted within the interval is what can be asked.
      expect(whole.bands[0]!.as_predicted, name).toBe(true);
      expect(Math.abs(whole.delay_measured!.delay_s - whole.delay_measured!.stated_s), name).toBeLessThan(
        0.5,
      );
    }
  });

  it("counts every sample of every stage in one state", () => {
    for (const chain of Object.values(CHAINS)) {
      const { results, clean } = run(planOf(chain), roughRecord(1500));
      for (const m of results[0]!.measures) {
        const counts = Object.values(m.counts.states()).reduce((a, b) => a + b, 0);
        expect(counts).toBe(m.counts.samples);
      }
      const last = results[0]!.measures.at(-1)?.counts ?? results[0]!.gridCounts;
      expect(last.samples).toBe(clean[0]!.length);
    }
  });
});

describe("provenance", () => {
  it("marks exactly the reach of one bridged row through a chain", () => {
    const times: number[] = [];
    for (let i = 0; i < 300; i++) if (i !== 150) times.push(i * 1_000_000);
    const record = { times, columns: [times.map((_, i) => i)] };
    const { marks, first } = run(planOf([RESAMPLE, { stage: "moving-average", points: 11 }]), record);
    const filled = marks[0]!.flatMap((m, i) => ((m & FILLED) !== 0 ? [first + i] : []));
    expect(filled).toEqual([145, 146, 147, 148, 149, 150, 151, 152, 153, 154, 155]);
  });
});

describe("trend", () => {
  it("with its residual gives the input back, and a constant leaves exactly nothing", () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 0, max: 5 }),
        fc.double({ min: -1e6, max: 1e6, noNaN: true }),
        (degree, c) => {
          const plan = planOf([RESAMPLE, { stage: "detrend", degree, over: "50 s" }]);
          const flat = run(plan, evenRows(new Float64Array(200).fill(c), 1_000_000));
          // A negative zero is nothing, too.
          for (const v of flat.clean[0]!) expect(v + 0).toBe(0);
        },
      ),
      { numRuns: 30 },
    );
  });
});
