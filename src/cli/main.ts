/** The command line: reads the words, calls one command, returns its exit code. */
import { Command, CommanderError } from "commander";
import { type CleanOptions, clean, type Streams } from "./clean.ts";
import { DONE, WRONG } from "./exit-codes.ts";
import type { RecheckOptions } from "./recheck.ts";
import { type RehearseOptions, rehearse } from "./rehearse.ts";
import { VERSION } from "./version.ts";

/** @param words  the arguments after the program's name */
export async function main(words: readonly string[], streams: Streams): Promise<number> {
  let code = DONE;
  const program = new Command("forebay")
    .description(
      "Cleans timestamped field logs by a declared chain of stages and accounts for everything it takes out.",
    )
    .version(VERSION, "--version", "print the version")
    .helpOption("--help", "print this help")
    .configureHelp({ helpWidth: 80 })
    .configureOutput({
      writeOut: (text) => streams.out(text),
      writeErr: (text) => streams.err(text),
      getOutHelpWidth: () => 80,
      getErrHelpWidth: () => 80,
    })
    .exitOverride()
    .showSuggestionAfterError();
  program
    .command("clean")
    .argument("<pipeline>", "pipeline file")
    .description("deletes nothing and never changes a log; cleans the logs with the pipeline")
    .option("--logs <glob...>", "these logs instead of those named in the pipeline")
    .option("--folder <dir>", "write here instead of the folder named in the pipeline")
    .option("--from <time>", "write only from this time on (ISO 8601)")
    .option("--until <time>", "write only up to this time, itself not included (ISO 8601)")
    .option("--journal <file>", "append JSON lines of what happens to this file")
    .option("--quiet", "print only what went wrong")
    .action(async (path: string, options: CleanOptions) => {
      code = await clean(path, options, streams);
    });
  program
    .command("rehearse")
    .argument("<pipeline>", "pipeline file")
    .description("check the pipeline and design every filter, without reading any data")
    .option("--interval <time>", 'the log\'s own interval, for instance "10 ms"')
    .option("--json", "print the design with the account's keys")
    .action((path: string, options: RehearseOptions) => {
      code = rehearse(path, options, streams);
    });
  program
    .command("recheck")
    .argument("<account>", "account of an earlier run (NAME.account.json)")
    .description("run a recorded run again and name the first input, setting or output that differs")
    .option("--pipeline <file>", "the pipeline file, when it is not near the account")
    .action(async (path: string, options: RecheckOptions) => {
      const { recheck } = await import("./recheck.ts");
      code = await recheck(path, options, streams);
    });
  program
    .command("stages")
    .argument("[name]", "one stage")
    .description("list the stages, or the settings of one")
    .action(async (name: string | undefined) => {
      const { stagesCommand } = await import("./stages.ts");
      code = stagesCommand(name, streams);
    });
  program
    .command("schema")
    .description("print the JSON Schema of the pipeline file, or of the account")
    .option("--account", "of the account (NAME.account.json)")
    .action(async (options: { account?: boolean }) => {
      const { schemaCommand } = await import("./schema.ts");
      code = schemaCommand(options, streams);
    });
  program.addHelpText(
    "after",
    `
The common case:
  forebay rehearse pipelines/sump-level.yaml   is the pipeline right?
  forebay clean pipelines/sump-level.yaml      clean its logs

Exit codes: 0 done; 1 fault in forebay; 2 command or pipeline wrong, nothing was
run; 3 some logs could not be cleaned; 4 a requirement or alias limit was not met.`,
  );
  try {
    await program.parseAsync([...words], { from: "user" });
  } catch (error) {
    if (!(error instanceof CommanderError)) throw error;
    return error.exitCode === 0 ? DONE : WRONG;
  }
  return code;
}
