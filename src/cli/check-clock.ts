import { DiagnosticError, nearestName, quoted } from "../diagnostics.ts";
import { TimeReader } from "../logs/time-reader.ts";
import type { LoadedPipeline } from "../pipeline/load.ts";
import { clockOf } from "../pipeline/read-request.ts";

const FORMS = [
  "iso-8601",
  "unix-s",
  "unix-ms",
  "unix-us",
  "unix-ns",
  "elapsed-s",
  "elapsed-ms",
  "elapsed-us",
  "elapsed-ns",
  "serial-day-1900",
  "serial-day-1904",
];

/** @throws DiagnosticError when the settings of the clock cannot be what they are meant to be, before any log is read */
export function checkClock(loaded: LoadedPipeline): void {
  const { form, ...settings } = clockOf(loaded.pipeline.logs.time);
  const made = TimeReader.make(form ?? "iso-8601", settings);
  if (made instanceof TimeReader) return;
  const given = {
    form,
    zone: settings.zone,
    date: settings.date,
    start: settings.start,
    rollover: settings.rollover,
  }[made.setting];
  const allowed = {
    form: `${FORMS.join(", ")}, or a Unicode date pattern such as dd/MM/yyyy HH:mm:ss.SSS`,
    zone: "an IANA name such as Europe/Berlin, UTC, or an offset such as +01:00",
    date: "a date: yyyy-MM-dd",
    start: "an ISO 8601 time with Z or an offset",
    rollover: "a value above the largest count",
  }[made.setting];
  const near = made.setting === "form" && form !== undefined ? nearestName(form, FORMS) : undefined;
  throw new DiagnosticError([
    {
      code: "clock-settings",
      severity: "error",
      file: loaded.shownName,
      ...loaded.at(["logs", "time", made.setting]),
      problem: `logs.time.${made.setting}: ${made.why}`,
      given: given === undefined ? `no ${made.setting}` : quoted(String(given)),
      allowed,
      todo: near === undefined ? `set ${made.setting}` : `write ${near}`,
    },
  ]);
}
