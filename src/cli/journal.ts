/** Progress and logs: JSON lines to stderr or a file, a readable form on a terminal. */
import { pino } from "pino";

export interface Journal {
  info(fields: Record<string, unknown>, message: string): void;
  warn(fields: Record<string, unknown>, message: string): void;
  error(fields: Record<string, unknown>, message: string): void;
  /** Shows how far a long step is; does nothing away from a terminal. */
  progress(title: string, step: string, share: number): void;
  /** Clears the progress line. */
  settle(): void;
}

export interface JournalOptions {
  /** JSON lines go to this file as well. */
  readonly file?: string;
  readonly quiet: boolean;
  readonly terminal: boolean;
}

const BAR = 24;
const REDRAW_MS = 100;

export function openJournal(options: JournalOptions): Journal {
  const toFile =
    options.file === undefined
      ? null
      : pino({ base: null }, pino.destination({ dest: options.file, sync: true, mkdir: true }));
  const toStderr =
    options.terminal || options.quiet
      ? null
      : pino({ base: null }, pino.destination({ dest: 2, sync: true }));
  const started = Date.now();
  let drawn = 0;
  let shown = false;
  const settle = () => {
    if (shown) process.stderr.write("\r\x1b[K");
    shown = false;
  };
  const say = (level: "info" | "warn" | "error") => (fields: Record<string, unknown>, message: string) => {
    toFile?.[level](fields, message);
    toStderr?.[level](fields, message);
  };
  return {
    info: say("info"),
    warn: say("warn"),
    error: say("error"),
    progress(title, step, share) {
      if (!options.terminal || options.quiet) return;
      const now = Date.now();
      if (now - drawn < REDRAW_MS || now - started < 5 * REDRAW_MS) return;
      drawn = now;
      shown = true;
      const done = Math.round(BAR * Math.min(1, share));
      const bar =
        share > 0 ? `[${"#".repeat(done)}${"-".repeat(BAR - done)}] ${Math.round(100 * share)} %` : "";
      process.stderr.write(`\r\x1b[K${title}: ${step} ${bar}`);
    },
    settle,
  };
}
