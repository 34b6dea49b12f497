/**
 * The account's schema, from which its JSON Schema is made. Held to the type in account-format.ts by the
 * compiler: what one has and the other lacks does not build. Objects are open: keys may be added.
 */
import { z } from "zod";
import type { Account } from "./account-format.ts";

const text = z.string();
const num = z.number();
const maybe = z.number().nullable();
const whole = z.int().min(0);
const digest = z.string().regex(/^[0-9a-f]{64}$/);
const time = z.string().regex(/^-?\d{4,6}-\d\d-\d\dT\d\d:\d\d:\d\d(\.\d{3}|\.\d{6})?Z$/);
const numbers = z.array(num);
const file = { file: text, bytes: whole, sha256: digest };
const lines = z.array(z.int().min(1));

const states = z.object({
  measured: whole,
  filled: whole,
  end: whole,
  thin: whole,
  suspect: whole,
  provisional: whole,
  screened: whole,
  missing: whole,
});

const input = z.object({
  ...file,
  rows: z.object({
    read: whole,
    used: whole,
    merged: whole,
    set_aside: z.record(text, whole),
    set_aside_lines: z.record(text, lines),
    reordered: whole,
    reordered_lines: lines,
  }),
  missing_cells: z.record(text, whole),
  unreadable_cells: z.record(text, z.object({ count: whole, lines })),
  found: z.record(text, text),
});

const timing = z.object({
  first: time,
  last: time,
  rows: whole,
  nominal_interval_s: num,
  fitted_interval_s: maybe,
  drift_ppm: maybe,
  jitter_sd_s: maybe,
  gap_count: whole,
  gap_total_s: num,
  gaps: z.array(z.object({ from: time, to: time, length_s: num })),
});

const extreme = z.object({ value: num, time }).nullable();

const band = z.object({
  name: text,
  from_Hz: num,
  to_Hz: num,
  p_in: num,
  p_out: num,
  p_removed: num,
  cross: num,
  closure: maybe,
  predicted_out: maybe,
  as_predicted: z.boolean().nullable(),
  degrees_of_freedom: num,
  finding: text,
});

const spectrum = z.object({
  window: text,
  overlap_pct: num,
  segment_samples: whole,
  resolution_Hz: num,
  enbw_Hz: num,
  segments: whole,
  degrees_of_freedom: num,
  interval_95: z.object({ lower: num, upper: num }),
  integral_in: num,
  mean_square_in: num,
  frequency_Hz: numbers,
  psd_in: numbers,
  psd_out: numbers,
  psd_removed: numbers,
});

const strip = z.object({
  from: time,
  column_s: num,
  in_low: z.array(maybe),
  in_high: z.array(maybe),
  out_low: z.array(maybe),
  out_high: z.array(maybe),
  out_state: z.array(states.keyof().nullable()),
});

const channel = z.object({
  unit: text,
  accounted: z.boolean(),
  samples: whole,
  mean_in: maybe,
  mean_out: maybe,
  rms_in: maybe,
  rms_out: maybe,
  rms_removed: maybe,
  variance_removed_pct: maybe,
  variance_removed: maybe,
  delay_measured: z.object({ delay_s: num, stated_s: num, correlation: num }).nullable(),
  strip: strip.nullable(),
  removal: z
    .object({
      from: time,
      column_s: num,
      rms: z.array(maybe),
      low: z.array(maybe),
      high: z.array(maybe),
      events: z.array(z.object({ time, removed: num, times_rms: num })),
    })
    .nullable(),
  basis: z.enum(["samples", "segment spectra"]).nullable(),
  extremes: z
    .object({
      highest_in: extreme,
      highest_out: extreme,
      lowest_in: extreme,
      lowest_out: extreme,
      height_lost: maybe,
      depth_lost: maybe,
    })
    .nullable(),
  bands: z.array(band),
  tones: z.array(
    z.object({ frequency_Hz: num, amplitude: num, gain_dB: num, lands_at_Hz: num, folds: z.boolean() }),
  ),
  spectrum: spectrum.nullable(),
  counts: states,
  holds: states,
});

const edge = z.union([num, numbers]).nullable();

const alias = z.object({
  anti_alias: z.enum(["designed", "upstream", "none"]),
  accepted: z.boolean(),
  kept_to_Hz: num,
  design_worst_gain_dB: num,
  design_source_Hz: num,
  design_met: z.boolean(),
  ratio_dB: maybe,
  worst_channel: text.nullable(),
  worst_band: z.object({ from_Hz: num, to_Hz: num }).nullable(),
  source_Hz: maybe,
  lands_at_Hz: maybe,
  limit_dB: num,
  met: z.boolean(),
});

const stage = z.object({
  place: z.int().min(1),
  stage: text,
  says: text,
  settings: z.record(text, z.unknown()),
  in: z.object({ interval_s: maybe, samples: whole }),
  out: z.object({ interval_s: maybe, samples: whole }),
  taps: whole.nullable(),
  coefficients: numbers.nullable(),
  delay: z.object({ samples: num, introduced_s: num, compensated_s: num, residual_s: num }),
  look_ahead_s: maybe,
  end_s: num,
  rise_s: maybe,
  overshoot_pct: maybe,
  gain: z.object({ dc: num, f_1dB_Hz: edge, f_3dB_Hz: edge, f_6dB_Hz: edge }).nullable(),
  enbw_Hz: maybe,
  response: z.object({ frequency_Hz: numbers, gain_dB: numbers }).nullable(),
  step: z.object({ time_s: numbers, value: numbers }).nullable(),
  folds: z.array(z.object({ frequency_Hz: num, lands_at_Hz: num, gain_dB: num, inverted: z.boolean() })),
  channels: z.record(text, channel),
  alias: alias.nullable(),
  notes: z.record(text, z.unknown()),
});

const chain = z.object({
  in_interval_s: num,
  out_interval_s: num,
  delay_s: num,
  introduced_s: num,
  compensated_s: num,
  look_ahead_s: maybe,
  end_s: num,
  rise_s: maybe,
  first: time.nullable(),
  last: time.nullable(),
  channels: z.record(
    text,
    z.object({
      unit: text,
      rms_in: maybe,
      rms_out: maybe,
      counts: states,
      removal: channel.nullable(),
      strip,
    }),
  ),
});

const schema = z.object({
  format: z.literal("forebay-account/1"),
  software: z.object({ name: z.literal("forebay"), version: text }),
  pipeline: z.object({ name: text, about: text.nullable(), sha256: digest, text }),
  logger: text.nullable(),
  channels: z.array(z.object({ name: text, unit: text, column: text })),
  scope: z.object({ from: time.nullable(), until: time.nullable() }),
  inputs: z.array(input),
  timing: timing.nullable(),
  stages: z.array(stage),
  chain,
  requirements: z.array(
    z.object({
      requirement: text,
      channel: text.nullable(),
      predicted: text.nullable(),
      measured: text.nullable(),
      margin: text.nullable(),
      met: z.boolean(),
    }),
  ),
  verdict: z.object({ met: z.boolean(), remarks: z.array(text) }),
  cautions: z.array(text),
  outputs: z.array(z.object({ ...file, rows: whole })),
});

type Same<A, B> = [A] extends [B] ? ([B] extends [A] ? true : never) : never;
/** Does not compile when schema and type part. */
export const SCHEMA_AND_TYPE_AGREE: Same<z.infer<typeof schema>, Account> = true;

/** JSON Schema (2020-12) of `NAME.account.json`. */
export function accountJsonSchema(): Record<string, unknown> {
  // As input, objects stay open: a later version may add keys.
  return { ...z.toJSONSchema(schema, { io: "input" }), title: "forebay account" } as Record<string, unknown>;
}
