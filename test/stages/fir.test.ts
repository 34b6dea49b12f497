import { describe, expect, it } from "vitest";
import { removedLag } from "../../src/engine/run-chain.ts";
import { stageDesignAccount } from "../../src/report/stage-account.ts";
import { gainAt } from "../../src/signal/response.ts";
import { type Entry, evenRows, planOf, run } from "../engine/harness.ts";
import sincs from "../reference/03-windowed-sinc-taps.json" with { type: "json" };
import edges from "../reference/11-centred-filtering-edges.json" with { type: "json" };
import { clean, largest, present, SECONDS } from "./parts/small.ts";

const fir = (settings: Record<string, unknown>): Entry => ({ stage: "fir", ...settings });
const account = (settings: Record<string, unknown>, grid: Entry = SECONDS) => {
  const plan = planOf([grid, fir(settings)]);
  return { ...stageDesignAccount(plan, plan.stages[0]!), design: plan.stages[0]!.design };
};

describe("given taps (reference 11)", () => {
  const rounding = (x: readonly number[]) => 1e-12 * largest(x);

  it.each(edges.cases.filter((c) => c.id.endsWith("-causal-zero-start")))(
    "$id: in order of convolution, the first tap on the newest sample",
    ({ inputs, expected }) => {
      const x = inputs.x as number[];
      const taps = inputs.weights!;
      const got = present(clean([SECONDS, fir({ coefficients: taps, reach: "past-only" })], x));
      expect(got[0]![0]).toBe(taps.length - 1);
      for (const [t, v] of got)
        expect(Math.abs(v - (expected.y as number[])[t]!)).toBeLessThanOrEqual(rounding(x));
    },
  );

  it.each(edges.cases.filter((c) => c.id.endsWith("-valid") && !c.id.startsWith("asym")))(
    "$id: centred",
    ({ inputs, expected }) => {
      const x = inputs.x as number[];
      const got = present(clean([SECONDS, fir({ coefficients: inputs.weights })], x));
      expect(got[0]![0]).toBe(expected.firstFullIndexCentre);
      for (const [i, [, v]] of got.entries())
        expect(Math.abs(v - (expected.y as number[])[i]!)).toBeLessThanOrEqual(rounding(x));
    },
  );
});

describe("windowed sinc of given size (reference 03)", () => {
  const shapes = new Map([
    ["lowpass", "low-pass"],
    ["highpass", "high-pass"],
    ["bandpass", "band-pass"],
    ["bandstop", "band-stop"],
  ]);

  it.each(sincs.cases.filter((c) => c.inputs.scale === true))("$id", ({ inputs, expected }) => {
    const { coefficients } = account({
      shape: shapes.get(inputs.passType),
      taps: inputs.taps,
      edge: inputs.cutoffCyclesPerSample.map((f) => `${f} cycles/sample`),
      window: inputs.window === "bartlett" ? "triangular" : inputs.window,
      ...(inputs.beta == null ? {} : { beta: inputs.beta }),
    });
    for (const [i, w] of coefficients!.entries())
      expect(Math.abs(w - expected.taps[i]!)).toBeLessThanOrEqual(1e-14);
  });
});

describe("specifications", () => {
  const KEPT = [
    ["low-pass", { pass: "60 Hz", stop: "90 Hz" }, [[0, 60]], [[90, 180]]],
    ["high-pass", { pass: "90 Hz", stop: "60 Hz" }, [[90, 180]], [[0, 60]]],
    [
      "band-pass",
      { pass: ["60 Hz", "90 Hz"], stop: ["40 Hz", "110 Hz"] },
      [[60, 90]],
      [
        [0, 40],
        [110, 180],
      ],
    ],
    [
      "band-stop",
      { pass: ["40 Hz", "110 Hz"], stop: ["60 Hz", "90 Hz"] },
      [
        [0, 40],
        [110, 180],
      ],
      [[60, 90]],
    ],
  ] as const;

  it.each(KEPT)("%s: the response stays inside the mask, at 360 Hz", (shape, bands, pass, stop) => {
    for (const method of ["auto", "windowed-sinc"]) {
      const { design } = account(
        { shape, ...bands, ripple: "0.2 dB", attenuation: "65 dB", method },
        { stage: "resample", rate: "360 Hz" },
      );
      const over = (band: readonly [number, number]) =>
        Array.from({ length: 801 }, (_, i) => {
          const f = (band[0] + ((band[1] - band[0]) * i) / 800) / 360;
          return 20 * Math.log10(Math.max(1e-20, gainAt(design.taps!, f)));
        });
      for (const band of pass)
        for (const dB of over(band)) expect(Math.abs(dB)).toBeLessThanOrEqual(0.2 + 1e-6);
      for (const band of stop) for (const dB of over(band)) expect(dB).toBeLessThanOrEqual(-65 + 1e-4);
      expect(design.taps!.length % 2).toBe(1);
    }
  });

  it("are the same in hertz, as periods and in cycles/sample", () => {
    const of = (pass: string, stop: string) =>
      account(
        { shape: "low-pass", pass, stop, method: "windowed-sinc" },
        { stage: "resample", interval: "10 s" },
      ).coefficients;
    const hertz = of("0.01 Hz", "0.02 Hz");
    expect(of("100 s", "50 s")).toEqual(hertz);
    expect(of("0.1 cycles/sample", "0.2 cycles/sample")).toEqual(hertz);
    expect(of("10 mHz", "20 mHz")).toEqual(hertz);
  });
});

describe("gain where it is to be 1", () => {
  it.each([
    ["low-pass", "0.1 Hz", 0],
    ["high-pass", "0.3 Hz", 0.5],
    ["band-stop", ["0.1 Hz", "0.2 Hz"], 0],
    ["band-pass", ["0.1 Hz", "0.2 Hz"], 0.15],
  ] as const)("%s", (shape, edge, at) => {
    for (const taps of [21, 61, 201])
      for (const window of ["hann", "hamming", "blackman", "rectangular", "triangular"]) {
        const { design, gain } = account({ shape, taps, edge, window });
        expect(Math.abs(gainAt(design.taps!, at) - 1)).toBeLessThan(1e-14);
        if (at === 0) expect(gain!.dc).toBeCloseTo(1, 14);
      }
  });

  it("the -6 dB edge stands where it was asked for", () => {
    const { gain } = account({ shape: "low-pass", taps: 201, edge: "0.1 Hz" });
    expect(gain!.f_6dB_Hz).toBeCloseTo(0.1, 4);
    const { gain: band } = account({ shape: "band-pass", taps: 401, edge: ["0.1 Hz", "0.2 Hz"] });
    expect((band!.f_6dB_Hz as number[])[0]).toBeCloseTo(0.1, 4);
    expect((band!.f_6dB_Hz as number[])[1]).toBeCloseTo(0.2, 4);
  });
});

describe("where the result stands in time", () => {
  it("a difference of neighbours is the slope half-way between them, with its sign", () => {
    const parabola = Array.from({ length: 12 }, (_, i) => (i - 5) ** 2);
    const got = present(clean([SECONDS, fir({ coefficients: [1, -1] })], parabola, -5));
    for (const [t, v] of got) expect(v).toBe(2 * t);
    expect(got[0]![0]).toBe(-4.5);
    const wide = present(clean([SECONDS, fir({ coefficients: [0.5, 0, -0.5] })], parabola, -5));
    for (const [t, v] of wide) expect(v).toBe(2 * t);
    const late = clean([SECONDS, fir({ coefficients: [0.5, 0, -0.5], reach: "past-only" })], parabola, -5);
    for (const [t, v] of present(late)) expect(v).toBe(2 * (t - 1));
  });

  it("delay of taps without symmetry is told as a real number, with its range", () => {
    const { delay, notes } = account({ coefficients: [4, 2, 1], reach: "past-only" });
    expect(delay.samples).toBeCloseTo((2 + 2) / 7, 14);
    expect(delay.residual_s).toBeCloseTo(4 / 7, 14);
    expect(notes["group_delay_lowest_samples"] as number).toBeLessThanOrEqual(4 / 7 + 1e-12);
    expect(notes["group_delay_highest_samples"] as number).toBeGreaterThanOrEqual(4 / 7 - 1e-12);
  });

  it("a centred filter looks ahead by half its length, a past-only one not at all", () => {
    const size = { shape: "low-pass", taps: 41, edge: "0.05 Hz" };
    expect(account(size).look_ahead_s).toBe(20);
    expect(account(size).end_s).toBe(20);
    expect(account({ ...size, taps: 40 }).look_ahead_s).toBe(19.5);
    expect(account({ ...size, taps: 40 }).end_s).toBe(19.5);
    const past = account({ ...size, reach: "past-only" });
    expect([past.look_ahead_s, past.end_s, past.delay.residual_s]).toEqual([0, 40, 20]);
  });

  it("what was removed stands beside its input, whether the filter lags or runs ahead", () => {
    const x = Array.from({ length: 200 }, (_, i) => Math.sin(i / 4) + (i % 3));
    for (const [settings, lag] of [
      [{ coefficients: [0.25, 0.5, 0.25] }, 0],
      [{ coefficients: [0.25, 0.5, 0.25], reach: "past-only" }, 1],
      [{ coefficients: [1, 0.5, 0, -0.5], reach: "past-only" }, -1],
    ] as const)
      for (const blockRows of [1, 7, 1000]) {
        const plan = planOf([SECONDS, fir(settings)]);
        expect(removedLag(plan, 0)).toBe(lag);
        const {
          clean: kept,
          first,
          removed,
          removedFirst,
        } = run(plan, evenRows(x, 1e6), {
          removed: true,
          blockRows,
        });
        let compared = 0;
        removed[0]!.forEach((r, i) => {
          const k = removedFirst + i;
          const y = kept[0]![k + lag - first]!;
          if (Number.isNaN(r) || Number.isNaN(y)) return;
          expect(Math.abs(y + r - x[k]!)).toBeLessThan(1e-14 * 4);
          compared++;
        });
        expect(compared).toBeGreaterThanOrEqual(196);
      }
  });
});

describe("ends", () => {
  it("turned: a straight line comes through a low-pass to its last sample", () => {
    const line = Array.from({ length: 80 }, (_, i) => 7 - 0.3 * i);
    const got = clean([SECONDS, fir({ shape: "low-pass", taps: 31, edge: "0.1 Hz", ends: "turned" })], line);
    expect(got.y.length).toBe(80);
    got.y.forEach((v, i) => expect(Math.abs(v - line[i]!)).toBeLessThan(1e-12));
  });

  it("part of the window: a constant stays, and weights that nearly cancel give nothing, not nonsense", () => {
    const part = { coefficients: [-1, 1, 3, 1, -1], ends: "part-window" };
    const got = clean([SECONDS, fir(part)], new Array(12).fill(2));
    got.y.forEach((v) => expect(v).toBeCloseTo(6, 13));
    // At the run's first sample only the taps [1, -1, …] are inside, and they cancel.
    const cancel = clean(
      [SECONDS, fir({ coefficients: [-1, 1, 0, 1, -1, 0, 1], reach: "past-only", ends: "part-window" })],
      [5, 5, 5, 5, 5, 5, 5, 5, 5],
    );
    for (const v of cancel.y) expect(Number.isNaN(v) || Math.abs(v - 5) < 1e-12).toBe(true);
    expect(cancel.y[1]).toBeNaN();
  });
});
