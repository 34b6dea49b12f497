import type { LogFile, ReadRequest, TimeSettings } from "../logs/rows.ts";
import type { Pipeline } from "./schema.ts";

/** What the log reader needs to know, from the pipeline's `logs` and `channels`. */
export function readRequest(pipeline: Pipeline, files: readonly LogFile[]): ReadRequest {
  const { logs, channels } = pipeline;
  const { layout, time } = logs;
  return {
    files,
    channels: channels.map(({ name, column }) => ({ name, column })),
    time: { column: time.column.length === 1 ? time.column[0]! : time.column, ...clockOf(time) },
    missing: logs.missing,
    layout: {
      ...(layout.separator === undefined ? {} : { separator: layout.separator }),
      ...(layout["decimal-sign"] === undefined ? {} : { decimalSign: layout["decimal-sign"] }),
      ...(layout["thousands-sign"] === undefined ? {} : { thousandsSign: layout["thousands-sign"] }),
      ...(layout.encoding === undefined ? {} : { encoding: layout.encoding }),
      ...(layout["names-line"] === undefined ? {} : { namesLine: layout["names-line"] }),
      ...(layout["data-from-line"] === undefined ? {} : { dataFromLine: layout["data-from-line"] }),
    },
    lateBy_us: logs["late-by"].us.num / logs["late-by"].us.den,
  };
}

/** The clock's settings that the file gives, without where its cells stand. */
export function clockOf(time: Pipeline["logs"]["time"]): Omit<TimeSettings, "column"> {
  const { form, zone, pivot, date, start, rollover } = time;
  return {
    ...(form === undefined ? {} : { form }),
    ...(zone === undefined ? {} : { zone }),
    ...(pivot === undefined ? {} : { pivot }),
    ...(date === undefined ? {} : { date }),
    ...(start === undefined ? {} : { start: start.text }),
    ...(rollover === undefined ? {} : { rollover }),
  };
}
