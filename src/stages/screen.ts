/**
 * `screen`: marks values that cannot be true, and never deletes a row. The tests stand in a fixed order: range,
 * rate of change, spike, stuck, agreement; each sees what the earlier ones left. The first four reject: the value
 * is kept out, and the account keeps it. Agreement only calls suspect: it does not know which channel is wrong.
 * See signal/steepest-change.ts, signal/spike-window.ts and signal/stuck-run.ts for the tests.
 *
 * An event looks like a spike when it is over in less than half of `spike.over`: ten to twenty row intervals are
 * a good length. In fewer, the deviation of a handful of values is often small by chance; the 10 deviations of
 * the default then still leave sharp but true peaks alone (tried on heartbeats and on an earthquake).
 */
import type { z } from "zod";
import {
  duration,
  finite,
  list,
  name,
  rateOfChange,
  stageSettings,
  strictObject,
} from "../pipeline/kinds.ts";
import type { Duration } from "../pipeline/quantities.ts";
import { FEWEST_VALUES } from "../signal/spike-window.ts";
import { Screening } from "./parts/screening.ts";
import { stretchOf, stretchSettings, stretchText } from "./parts/stretch.ts";
import type { DesignOutcome, Problem, RowStageDesign, Signal, Stage } from "./stage.ts";

const settings = stageSettings("screen", {
  range: list(finite({ about: "A value." }), {
    min: 2,
    max: 2,
    about: "Lowest and highest plausible value, in the channel's unit; a value outside is rejected.",
  }).optional(),
  "rate-of-change": rateOfChange({
    about:
      "Steepest plausible change; a value farther from the last one kept than this allows for the time between them is rejected.",
  }).optional(),
  spike: strictObject(
    {
      over: duration({
        about:
          "Span of time about each value; what lasts less than half of it looks like a spike. Ten to twenty row intervals.",
        example: "15 s",
      }),
      deviations: finite({
        min: 1,
        max: 1000,
        default: 10,
        about:
          "A value more than this many deviations (1.4826 times the median absolute deviation) from the median is rejected.",
      }),
      floor: finite({
        min: 0,
        about:
          "Least deviation, in the channel's unit, for stretches where most values are equal; the quantisation step found in the span when left out.",
        example: "0.001",
      }).optional(),
    },
    "Hampel identifier: values far from the median of those around them.",
  ).optional(),
  stuck: strictObject(
    {
      over: duration({
        about: "Values that do not move for longer than this are rejected.",
        example: "10 min",
      }),
      within: finite({
        min: 0,
        default: 0,
        about: "Largest difference, in the channel's unit, that still counts as not moving.",
      }),
    },
    "Values that do not move.",
  ).optional(),
  agree: strictObject(
    {
      with: name({ about: "The channel that should show the same.", example: "level-b" }),
      within: finite({ min: 0, about: "Largest difference, in the channel's unit.", example: "0.02" }),
    },
    "Two redundant channels: where they differ by more, both are marked suspect.",
  ).optional(),
  ...stretchSettings,
});
type Settings = z.output<typeof settings>;

const TESTS = ["range", "rate-of-change", "spike", "stuck", "agree"] as const;

function design(s: Settings, signal: Signal, selected: readonly number[]): DesignOutcome<RowStageDesign> {
  const problems: Problem[] = [];
  const given = TESTS.filter((test) => s[test] !== undefined);
  if (given.length === 0)
    problems.push({
      code: "screen-nothing",
      severity: "error",
      path: [],
      problem: "the stage has no test",
      given: "none of the tests",
      allowed: TESTS.join(", "),
      todo: "add for instance range: [0, 6]",
    });
  const stretch = stretchOf(s, problems);
  if (s.range !== undefined && !(s.range[0]! < s.range[1]!))
    problems.push({
      code: "empty-range",
      severity: "error",
      path: ["range"],
      problem: "the range is empty",
      given: `${s.range[0]} to ${s.range[1]}`,
      allowed: "the lower value first",
      todo: "swap them, or correct one of them",
    });
  checkUnits(s, signal, selected, problems);
  const partner = s.agree === undefined ? null : checkPartner(s.agree.with, signal, selected, problems);
  if (problems.length > 0) return { design: null, problems };
  const half_s = (s.spike?.over.seconds ?? 0) / 2;
  const stuck_s = s.stuck?.over.seconds ?? 0;
  const names = selected.map((c) => signal.channels[c]!.name).join(", ");
  return {
    problems,
    design: {
      says: `Screened ${names}${stretchText(s)} by ${given.join(", then ")}; ${
        given.some((test) => test !== "agree")
          ? "rejected values are kept out and listed"
          : "suspect values stay"
      }.`,
      settings: {
        range: s.range ?? null,
        rate_of_change: s["rate-of-change"]?.text ?? null,
        spike:
          s.spike === undefined
            ? null
            : {
                over_s: s.spike.over.seconds,
                deviations: s.spike.deviations,
                floor: s.spike.floor ?? "quantisation step found in the span",
              },
        stuck: s.stuck === undefined ? null : { over_s: stuck_s, within: s.stuck.within },
        agree: s.agree ?? null,
        from: s.from?.text ?? null,
        until: s.until?.text ?? null,
      },
      channels: signal.channels,
      reach_s: {
        before: s["rate-of-change"] === undefined ? half_s + 2 * stuck_s : null,
        after: half_s + 2 * stuck_s,
      },
      notes: { order_of_tests: given },
      checkInterval: (nominal_s) => checkInterval(s, nominal_s),
      rowStage: () =>
        new Screening({
          range: s.range === undefined ? null : { low: s.range[0]!, high: s.range[1]! },
          steepest: s["rate-of-change"] === undefined ? null : s["rate-of-change"].perSecond / 1e6,
          spike:
            s.spike === undefined
              ? null
              : {
                  halfSpan_us: microseconds(s.spike.over) / 2,
                  deviations: s.spike.deviations,
                  floor: s.spike.floor ?? null,
                },
          stuck:
            s.stuck === undefined ? null : { over_us: microseconds(s.stuck.over), within: s.stuck.within },
          agree: partner === null ? null : { partner, within: s.agree!.within },
          stretch,
          channels: signal.channels.length,
          selected,
        }),
    },
  };
}

const microseconds = (d: Duration): number => d.us.num / d.us.den;

/** A limit is in the channel's unit, so channels of one stage share one. */
function checkUnits(s: Settings, signal: Signal, selected: readonly number[], problems: Problem[]): void {
  const units = [...new Set(selected.map((c) => signal.channels[c]!.unit))];
  const limits = [
    ...(s.range === undefined ? [] : ["range"]),
    ...(s.spike?.floor === undefined ? [] : ["spike.floor"]),
    ...(s.stuck === undefined || s.stuck.within === 0 ? [] : ["stuck.within"]),
  ];
  if (limits.length > 0 && units.length > 1)
    problems.push({
      code: "screen-mixed-units",
      severity: "error",
      path: [limits[0]!.split(".")[0]!],
      problem: "a limit in the channel's unit is given for channels in different units",
      given: `${limits.join(", ")} for channels in ${units.join(", ")}`,
      allowed: "channels that share one unit",
      todo: "write one screen stage for each unit, with channels",
    });
  const rate = s["rate-of-change"];
  const other = selected.map((c) => signal.channels[c]!).find((c) => c.unit !== rate?.channelUnit);
  if (rate !== undefined && other !== undefined)
    problems.push({
      code: "rate-unit",
      severity: "error",
      path: ["rate-of-change"],
      problem: `channel ${other.name} is not in ${rate.channelUnit}`,
      given: rate.text,
      allowed: `a number and ${other.unit}/s, or another unit of time`,
      todo:
        units.length > 1
          ? "write one screen stage for each unit, with channels"
          : `write for instance ${rate.value} ${rate.unit.replace(rate.channelUnit, other.unit)}, if that is what is meant`,
    });
}

function checkPartner(
  partner: string,
  signal: Signal,
  selected: readonly number[],
  problems: Problem[],
): number | null {
  const at = signal.channels.findIndex((c) => c.name === partner);
  const others = selected.filter((c) => c !== at);
  const say = (p: Omit<Problem, "severity" | "path">) =>
    problems.push({ severity: "error", path: ["agree", "with"], ...p });
  if (at < 0)
    say({
      code: "unknown-channel",
      problem: "there is no such channel to agree with",
      given: partner,
      allowed: signal.channels.map((c) => c.name).join(", "),
      todo: "name a channel of this pipeline",
    });
  else if (others.length === 0)
    say({
      code: "agree-alone",
      problem: "a channel always agrees with itself",
      given: `${partner} with ${partner}`,
      allowed: "another channel",
      todo: "name the other of the two channels under with, or under channels",
    });
  else {
    const unlike = others.map((c) => signal.channels[c]!).find((c) => c.unit !== signal.channels[at]!.unit);
    if (unlike !== undefined)
      say({
        code: "agree-units",
        problem: "two channels in different units cannot be compared",
        given: `${unlike.name} in ${unlike.unit}, ${partner} in ${signal.channels[at]!.unit}`,
        allowed: "channels that share one unit",
        todo: "name under channels only those that measure the same",
      });
  }
  return problems.length > 0 ? null : at;
}

/** What only the log's own interval shows: spans of time that hold too few rows to judge by. */
function checkInterval(s: Settings, nominal_s: number): Problem[] {
  const problems: Problem[] = [];
  const seconds = (x: number) => `${Number(x.toPrecision(6))} s`;
  const least = (FEWEST_VALUES - 1) * nominal_s;
  if (s.spike !== undefined && s.spike.over.seconds < least * (1 - 1e-6))
    problems.push({
      code: "spike-span-below-log",
      severity: "error",
      path: ["spike", "over"],
      problem: `the span holds fewer than ${FEWEST_VALUES} rows, so no value could be judged`,
      given: `${s.spike.over.text}; the log has a row every ${seconds(nominal_s)}`,
      allowed: `at least ${seconds(least)}`,
      todo: `write ${seconds(15 * nominal_s)}`,
    });
  if (s.stuck !== undefined && s.stuck.over.seconds < nominal_s * (1 - 1e-6))
    problems.push({
      code: "stuck-span-below-log",
      severity: "error",
      path: ["stuck", "over"],
      problem: "the span is shorter than the log's own interval, so no two rows would be compared",
      given: `${s.stuck.over.text}; the log has a row every ${seconds(nominal_s)}`,
      allowed: `at least ${seconds(nominal_s)}`,
      todo: `write ${seconds(60 * nominal_s)} if values never stand still that long`,
    });
  return problems;
}

export const screen: Stage<typeof settings, RowStageDesign> = {
  name: "screen",
  about:
    "Marks values that cannot be true: out of range, too fast, spikes, stuck, or at odds with another channel.",
  settings,
  worksOn: "rows",
  design,
};
