#!/usr/bin/env node
import { main } from "./cli/main.ts";

// A reader that has seen enough (`forebay … | head`) is not an error.
process.stdout.on("error", (error: NodeJS.ErrnoException) => {
  if (error.code === "EPIPE") process.exit(0);
  throw error;
});

try {
  process.exitCode = await main(process.argv.slice(2), {
    out: (text) => process.stdout.write(text),
    err: (text) => process.stderr.write(text),
    terminal: process.stderr.isTTY === true,
  });
} catch (error) {
  const text = error instanceof Error ? (error.stack ?? error.message) : String(error);
  process.stderr.write(`forebay: a fault in forebay itself; nothing half-written was published\n${text}\n`);
  process.exitCode = 1;
}
