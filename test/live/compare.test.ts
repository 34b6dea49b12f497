/**
 * Live comparison with SciPy (Debian's python3-scipy): random specifications, responses and outputs. Seed printed;
 * set LIVE_SEED to run one again. A difference is explained by a published definition, never by a wider tolerance.
 */
import { spawnSync } from "node:child_process";
import { dirname, join } from "node:path";
import { fileURLToPath } from "node:url";
import { describe, expect, it } from "vitest";
import { slidingDot } from "../../src/signal/convolve.ts";
import type { DesignBand } from "../../src/signal/design-bands.ts";
import { DesignError } from "../../src/signal/design-error.ts";
import { designEquiripple } from "../../src/signal/equiripple.ts";
import { designLeastSquares, squaredError } from "../../src/signal/least-squares.ts";
import { amplitudeAt } from "../../src/signal/linear-phase.ts";
import { fitPolynomial } from "../../src/signal/polynomial-fit.ts";
import { gainAt } from "../../src/signal/response.ts";
import { savitzkyGolayTaps } from "../../src/signal/savitzky-golay.ts";
import { welch } from "../../src/signal/welch.ts";
import { designWindowedSinc, type FilterShape } from "../../src/signal/windowed-sinc.ts";
import type { WindowKind } from "../../src/signal/windows.ts";

const PYTHON = process.env["LIVE_PYTHON"] ?? "/usr/bin/python3";
const SCRIPT = join(dirname(fileURLToPath(import.meta.url)), "answer.py");
const SEED = Number(process.env["LIVE_SEED"] ?? 1 + (Date.now() % 2147483646));
console.log(`live comparison, LIVE_SEED=${SEED}`);

let state = SEED;
const draw = (): number => (state = (state * 16807) % 2147483647) / 2147483647;
const between = (a: number, b: number): number => a + (b - a) * draw();
const whole = (a: number, b: number): number => Math.floor(between(a, b + 1));
const pick = <T>(list: readonly T[]): T => list[whole(0, list.length - 1)]!;
const series = (n: number): number[] =>
  Array.from({ length: n }, (_, i) => between(-1, 1) + Math.sin(i / 7) + 3);

function ask(questions: readonly object[]): { ok?: number[]; refused?: string }[] {
  const run = spawnSync(PYTHON, [SCRIPT], {
    input: JSON.stringify(questions),
    encoding: "utf8",
    maxBuffer: 1 << 28,
  });
  if (run.status !== 0) throw new Error(`SciPy did not answer: ${run.stderr}`);
  return JSON.parse(run.stdout);
}

const worst = (a: ArrayLike<number>, b: ArrayLike<number>): number => {
  expect(a.length).toBe(b.length);
  let most = 0;
  for (let i = 0; i < a.length; i++) most = Math.max(most, Math.abs(a[i]! - b[i]!));
  return most;
};

/** Edges that keep away from 0, from 0.5 and from each other. */
function edgesOf(shape: FilterShape): number[] {
  const first = between(0.02, 0.35);
  return shape === "low-pass" || shape === "high-pass" ? [first] : [first, between(first + 0.05, 0.48)];
}

describe("against SciPy", () => {
  it("windowed-sinc taps, 150 designs", () => {
    const designs = Array.from({ length: 150 }, () => {
      const shape = pick(["low-pass", "high-pass", "band-pass", "band-stop"] as const);
      const window = pick<WindowKind>(["hann", "hamming", "blackman", "kaiser", "triangular", "rectangular"]);
      const beta = between(0, 14);
      return { ask: "sinc", taps: 2 * whole(4, 150) + 1, shape, edges: edgesOf(shape), window, beta };
    });
    ask(designs).forEach((a, i) => {
      const { ask: _, beta, ...d } = designs[i]!;
      const mine = designWindowedSinc({ ...d, ...(d.window === "kaiser" ? { beta } : {}) });
      expect(worst(mine, a.ok!), JSON.stringify(designs[i])).toBeLessThan(1e-12);
    });
  });

  it("responses and outputs, 80 filters", () => {
    const filters = Array.from({ length: 80 }, () =>
      Array.from({ length: whole(1, 120) }, () => between(-1, 1)),
    );
    const at = Array.from({ length: 40 }, () => between(0, 0.5));
    const x = series(400);
    const gains = ask(filters.map((taps) => ({ ask: "gain", taps, at })));
    const outputs = ask(filters.map((taps) => ({ ask: "filter", taps, x })));
    filters.forEach((taps, i) => {
      const h = Float64Array.from(taps);
      expect(
        worst(
          at.map((f) => gainAt(h, f)),
          gains[i]!.ok!,
        ),
      ).toBeLessThan(1e-11);
      const out = new Float64Array(x.length - taps.length + 1);
      slidingDot(Float64Array.from(x), 0, 1, Float64Array.from(taps).reverse(), out, 0, out.length);
      expect(worst(out, outputs[i]!.ok!)).toBeLessThan(1e-11);
    });
  });

  it("least squares, 40 designs: the integral of the squared error is never larger", () => {
    const designs = Array.from({ length: 40 }, () => {
      const a = between(0.05, 0.35);
      const b = between(a + 0.03, 0.45);
      const [low, high] = pick([
        [1, 0],
        [0, 1],
      ] as const);
      return {
        ask: "least-squares",
        taps: 2 * whole(5, 40) + 1,
        bands: [0, a, b, 0.5],
        gains: [low, low, high, high],
        weights: [between(0.5, 4), between(0.5, 4)],
      };
    });
    ask(designs).forEach((a, i) => {
      const d = designs[i]!;
      const bands = bandsFrom(d);
      const mine = designLeastSquares(d.taps, bands);
      // Narrow free stretches leave the taps ill-determined: the criterion itself is compared.
      expect(squaredError(mine.taps, bands)).toBeLessThanOrEqual(
        squaredError(Float64Array.from(a.ok!), bands) * (1 + 1e-9) + 1e-18,
      );
    });
  });

  it("equiripple, 40 designs: the largest weighted error is never larger", () => {
    const designs = Array.from({ length: 40 }, () => {
      const a = between(0.05, 0.3);
      const b = between(a + 0.03, 0.45);
      return {
        ask: "equiripple",
        taps: 2 * whole(5, 35) + 1,
        bands: [0, a, b, 0.5],
        gains: [1, 0],
        weights: [1, between(0.2, 20)],
      };
    });
    let compared = 0;
    ask(designs).forEach((a, i) => {
      const d = designs[i]!;
      const bands = bandsFrom({ ...d, gains: [1, 1, 0, 0] });
      try {
        const mine = designEquiripple(d.taps, bands);
        if (a.ok === undefined) return;
        compared++;
        expect(mine.deviation).toBeLessThanOrEqual(largestError(Float64Array.from(a.ok), bands) * (1 + 1e-6));
      } catch (error) {
        // A deviation near rounding cannot be proved, and is refused rather than returned.
        if (!(error instanceof DesignError)) throw error;
      }
    });
    expect(compared).toBeGreaterThan(25);
  });

  it("Savitzky-Golay, 30 windows", () => {
    const windows = Array.from({ length: 30 }, () => {
      // Beyond these SciPy's raw powers lose digits; there the taps are held to polynomials in test/signal.
      const taps = 2 * whole(1, 12) + 1;
      return { ask: "savitzky-golay", taps, degree: whole(0, Math.min(4, taps - 1)) };
    });
    ask(windows).forEach((a, i) => {
      const { taps, degree } = windows[i]!;
      expect(worst(savitzkyGolayTaps(taps, degree, "centre"), a.ok!), `${taps}, ${degree}`).toBeLessThan(
        1e-11,
      );
    });
  });

  it("Welch densities, 30 records of any segment length", () => {
    const records = Array.from({ length: 30 }, () => ({
      ask: "welch",
      x: series(whole(300, 1200)),
      rate: between(0.01, 500),
      window: pick(["hann", "hamming", "blackman"] as const),
      segment: 2 * whole(8, 128),
    }));
    ask(records).forEach((a, i) => {
      const r = records[i]!;
      const mine = welch(Float64Array.from(r.x), {
        segment: r.segment,
        window: r.window,
        samplingRate_Hz: r.rate,
      });
      const top = Math.max(...a.ok!);
      expect(worst(mine.psd, a.ok!) / top).toBeLessThan(1e-11);
    });
  });

  it("polynomial trends, 30 records", () => {
    const records = Array.from({ length: 30 }, () => ({
      ask: "trend",
      x: series(whole(20, 500)),
      degree: whole(0, 5),
    }));
    ask(records).forEach((a, i) => {
      const { x, degree } = records[i]!;
      const t = Float64Array.from(x, (_, k) => k);
      const fit = fitPolynomial(t, Float64Array.from(x), degree)!;
      expect(
        worst(
          x.map((v, k) => v - fit.valueAt(k)),
          a.ok!,
        ),
      ).toBeLessThan(1e-10);
    });
  });
});

function bandsFrom(d: { bands: number[]; gains: number[]; weights: number[] }): DesignBand[] {
  return d.weights.map((weight, i) => ({
    from: d.bands[2 * i]!,
    to: d.bands[2 * i + 1]!,
    gain: [d.gains[2 * i]!, d.gains[2 * i + 1]!] as const,
    weight,
  }));
}

/** Largest weighted error on a grid of 3,000 points a tap: a peak between two points is missed by less than 2e-7 of it. */
function largestError(taps: Float64Array, bands: readonly DesignBand[]): number {
  let most = 0;
  for (const band of bands) {
    const points = Math.ceil(3000 * taps.length * (band.to - band.from)) + 2;
    for (let i = 0; i <= points; i++) {
      const f = band.from + ((band.to - band.from) * i) / points;
      const wanted = Array.isArray(band.gain) ? band.gain[0] : (band.gain as number);
      most = Math.max(most, band.weight * Math.abs(amplitudeAt(taps, f) - wanted));
    }
  }
  return most;
}
