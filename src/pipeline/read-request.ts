import type { LogFile, ReadRequest } from "../logs/rows.ts";
import type { Pipeline } from "./schema.ts";

/** What the log reader needs to know, from the pipeline's `logs` and `channels`. */
export function readRequest(pipeline: Pipeline, files: readonly LogFile[]): ReadRequest {
  const { logs, channels } = pipeline;
  const { layout, time } = logs;
  return {
    files,
    channels: channels.map(({ name, column }) => ({ name, column })),
    time: { column: time.column, form: time.form, ...(time.zone === undefined ? {} : { zone: time.zone }) },
    missing: logs.missing,
    layout: {
      ...(layout.separator === undefined ? {} : { separator: layout.separator }),
      ...(layout["decimal-sign"] === undefined ? {} : { decimalSign: layout["decimal-sign"] }),
      ...(layout.encoding === undefined ? {} : { encoding: layout.encoding }),
      ...(layout["names-line"] === undefined ? {} : { namesLine: layout["names-line"] }),
      ...(layout["data-from-line"] === undefined ? {} : { dataFromLine: layout["data-from-line"] }),
    },
    lateBy_us: logs["late-by"].us.num / logs["late-by"].us.den,
  };
}
