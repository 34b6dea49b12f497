/**
 * `decimate`: keeps every M-th sample, behind a filter that takes away what would fold into the band kept.
 * Folding: f lands at |f - M-th rate * nearest integer| (sampling theorem; Shannon 1949).
 */
import type { z } from "zod";
import { count, decibels, durationOrRate, oneOf, percent, stageSettings, truth } from "../pipeline/kinds.ts";
import { DesignError } from "../signal/design-error.ts";
import { coarserGrid, intervalSeconds } from "../signal/grid.ts";
import { keepEvery } from "../signal/grid-block.ts";
import { designBySpecification } from "../signal/specification.ts";
import { WindowKernel } from "../signal/window-kernel.ts";
import { windowPoints } from "./parts/lengths.ts";
import { worstFold } from "./parts/worst-fold.ts";
import type { AliasDesign, DesignOutcome, Problem, Signal, Stage } from "./stage.ts";

const MOST = 1_000_000;

const settings = stageSettings("decimate", {
  by: count({ min: 2, max: MOST, about: "Keep one sample in this many." }).optional(),
  to: durationOrRate({
    about: "The new sample interval (or rate): a whole multiple of the interval before.",
  }).optional(),
  "anti-alias": oneOf(["designed", "upstream"], {
    default: "designed",
    about:
      "Design a filter against aliases here, or rely on the stages above, whose response is then checked.",
  }),
  "passband-share": percent({
    min: 0.05,
    max: 0.49,
    default: "40 %",
    about: "Share of the new rate that is kept free of aliases and at full height.",
  }),
  attenuation: decibels({
    min: 10,
    max: 200,
    default: "80 dB",
    about: "Attenuation of the designed filter.",
  }),
  "alias-limit": decibels({
    min: -200,
    max: 0,
    default: "-60 dB",
    about: "Most that may fold into the band kept, checked on the design and on the data.",
  }),
  "accept-aliasing": truth({
    default: false,
    about: "Go on although the check on the design fails; recorded.",
  }),
});
type Settings = z.output<typeof settings>;

function design(s: Settings, signal: Signal, selected: readonly number[]): DesignOutcome {
  const grid = signal.grid!;
  const interval = intervalSeconds(grid);
  const problems: Problem[] = [];
  if (selected.length !== signal.channels.length)
    problems.push({
      code: "decimate-some-channels",
      severity: "error",
      path: ["channels"],
      problem: "decimation changes the grid, so all channels must pass it",
      given: `${selected.length} of ${signal.channels.length} channels`,
      allowed: "all channels",
      todo: "leave channels out, or write another pipeline for the others",
    });
  if ((s.by === undefined) === (s.to === undefined))
    problems.push({
      code: "decimation-factor",
      severity: "error",
      path: [],
      problem: "decimation needs its factor once",
      given: s.by === undefined ? "neither by nor to" : "both by and to",
      allowed: "one of by, to",
      todo: "keep one of them",
    });
  const factor = s.by ?? (s.to === undefined ? undefined : windowPoints(s.to, grid, ["to"], MOST, problems));
  if (factor === 1)
    problems.push({
      code: "decimation-factor",
      severity: "error",
      path: ["to"],
      problem: "the new interval is the old one: there is nothing to leave out",
      given: s.to?.text ?? "1",
      allowed: `a multiple of ${interval} s from ${2 * interval} s on`,
      todo: "take the stage out, or give a longer interval",
    });
  if (factor === undefined || problems.length > 0) return { design: null, problems };

  const share = s["passband-share"];
  let taps: Float64Array | null = null;
  const notes: Record<string, unknown> = {};
  if (s["anti-alias"] === "designed") {
    try {
      const made = designBySpecification({
        shape: "low-pass",
        pass: [share / factor],
        stop: [(1 - share) / factor],
        ripple_dB: 0.01,
        attenuation_dB: s.attenuation,
        method: "windowed-sinc",
        parity: "odd",
      });
      taps = made.taps;
      notes["designed_by"] = made.why;
      notes["achieved_attenuation_dB"] = made.achieved.attenuation_dB;
      notes["achieved_ripple_dB"] = made.achieved.ripple_dB;
    } catch (error) {
      if (!(error instanceof DesignError)) throw error;
      problems.push({
        code: "no-filter",
        severity: "error",
        path: [],
        problem: error.problem,
        given: error.given,
        allowed: error.allowed,
        todo: error.todo,
      });
      return { design: null, problems };
    }
  }

  const newRate = 1 / (interval * factor);
  const worst = worstFold(signal, selected, taps, interval, factor, share);
  const alias: AliasDesign = {
    antiAlias: s["anti-alias"],
    accepted: s["accept-aliasing"],
    keptTo_Hz: share * newRate,
    worstGain_dB: worst.gain_dB,
    source_Hz: worst.source_Hz,
    limit_dB: s["alias-limit"],
    met: worst.gain_dB <= s["alias-limit"],
  };
  if (!alias.met && !alias.accepted)
    problems.push({
      code: "aliases-on-design",
      severity: "error",
      path: ["anti-alias"],
      problem: `keeping every ${factor}th sample would fold ${hertz(worst.source_Hz)} to ${hertz(
        worst.lands_Hz,
      )} at ${db(worst.gain_dB)}`,
      given: `alias-limit ${db(s["alias-limit"])}, anti-alias: ${s["anti-alias"]}`,
      allowed: `at most ${db(s["alias-limit"])} in the band kept, 0 to ${hertz(share * newRate)}`,
      todo:
        s["anti-alias"] === "designed"
          ? "raise attenuation, or set accept-aliasing: true to go on and have it recorded"
          : "set anti-alias: designed, smooth more above, or set accept-aliasing: true to go on and have it recorded",
    });
  if (problems.some((p) => p.severity === "error")) return { design: null, problems };

  const n = taps?.length ?? 1;
  const after = (n - 1) / 2;
  return {
    problems,
    design: {
      grid: coarserGrid(grid, factor),
      says: `Kept every ${factor}th sample${
        taps === null
          ? ", relying on the filters above against aliases"
          : `, behind a low-pass of ${n} taps that keeps up to ${hertz(share * newRate)} and takes away what would fold into it`
      }.`,
      settings: {
        by: factor,
        to_s: factor * interval,
        "anti-alias": s["anti-alias"],
        "passband-share_pct": share * 100,
        ...(taps === null ? {} : { attenuation_dB: s.attenuation }),
        "alias-limit_dB": s["alias-limit"],
        "accept-aliasing": s["accept-aliasing"],
      },
      taps,
      delay: { samples: (n - 1) / 2, indexSamples: after, compensated_s: after * interval },
      reach: { before: n - 1 - after, after },
      end_s: after * interval,
      keepEvery: factor,
      alias,
      notes,
      kernel: ({ fullRate }) =>
        taps === null
          ? keepEvery(fullRate ? 1 : factor)
          : new WindowKernel({
              taps,
              after,
              ends: "blank",
              coverage: 1,
              keepEvery: fullRate ? 1 : factor,
              equal: false,
              betweenSamples: false,
            }),
    },
  };
}

const db = (x: number): string => `${(Math.abs(x) < 0.05 ? 0 : x).toFixed(1)} dB`;
const hertz = (f: number): string => `${Number(f.toPrecision(4))} Hz`;

export const decimate: Stage<typeof settings> = {
  name: "decimate",
  about: "Keeps every M-th sample, with a filter against aliases and a check of what would fold.",
  settings,
  design,
};
