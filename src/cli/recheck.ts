/** `forebay recheck`: runs a recorded run again and compares every digest; names the first difference. */
import { createHash } from "node:crypto";
import { dirname, join, resolve } from "node:path";
import { type Diagnostic, DiagnosticError, renderDiagnostic } from "../diagnostics.ts";
import { findSeries } from "../logs/find-series.ts";
import {
  findNear,
  firstDifference,
  storedFile,
  storedText,
  withTemporaryFolder,
} from "../outputs/stored-files.ts";
import { loadPipeline } from "../pipeline/load.ts";
import { planPipeline } from "../pipeline/plan.ts";
import { parseInstant } from "../pipeline/quantities.ts";
import { ACCOUNT_FORMAT } from "../report/account.ts";
import type { Account } from "../report/account-format.ts";
import { STAGES } from "../stages/registry.ts";
import type { Streams } from "./clean.ts";
import { cleanSeries } from "./clean-series.ts";
import { DONE, NOT_MET, WRONG } from "./exit-codes.ts";
import { gridBooks } from "./grid-books.ts";
import { shownPath } from "./shown-path.ts";
import { wrap } from "./text.ts";
import { VERSION } from "./version.ts";

export interface RecheckOptions {
  readonly pipeline?: string;
}

/** How far up from the account's folder the pipeline is looked for. */
const LEVELS_UP = 4;
const CLOSURE = 1e-9;

/** One thing compared. */
interface Check {
  readonly what: string;
  /** null: the same. */
  readonly difference: string | null;
}

export async function recheck(path: string, options: RecheckOptions, streams: Streams): Promise<number> {
  try {
    const account = readAccount(path);
    const folder = dirname(resolve(path));
    const pipelinePath = options.pipeline ?? findPipeline(account, folder);
    const checks = [
      ...books(account),
      software(account),
      pipelineCheck(account, pipelinePath),
      ...inputs(account, dirname(resolve(pipelinePath))),
      ...stored(account, folder),
    ];
    const blocked = checks.some((c) => c.difference !== null && !c.what.startsWith("output "));
    if (!blocked) checks.push(...(await again(account, path, folder, pipelinePath)));
    for (const { what, difference } of checks)
      streams.out(
        `${wrap(`${difference === null ? "same     " : "DIFFERENT"} ${what}${difference === null ? "" : `: ${difference}`}`, 80, " ".repeat(10))}\n`,
      );
    const first = checks.find((c) => c.difference !== null);
    streams.out(
      first === undefined
        ? "\nThe run was made again: every output is the same, byte for byte, and the books close.\n"
        : `\n${wrap(`First difference: ${first.what}: ${first.difference}`, 80)}\n${blocked ? "The run was not made again, since its outputs could not be the same.\n" : ""}`,
    );
    return first === undefined ? DONE : NOT_MET;
  } catch (error) {
    if (!(error instanceof DiagnosticError)) throw error;
    for (const d of error.diagnostics) streams.err(`${renderDiagnostic(d)}\n`);
    return WRONG;
  }
}

function fail(
  file: string,
  words: Pick<Diagnostic, "code" | "problem" | "given" | "allowed" | "todo">,
): DiagnosticError {
  return new DiagnosticError([{ severity: "error", file, line: 0, column: 0, ...words }]);
}

function readAccount(path: string): Account {
  const text = storedText(path);
  const words = {
    allowed: `an account (NAME.account.json, format ${ACCOUNT_FORMAT})`,
    todo: "name the account of a run",
  };
  if (text === null)
    throw fail(shownPath(path), {
      code: "no-account",
      problem: "the account cannot be read",
      given: "no such file, or not readable",
      ...words,
    });
  let data: unknown;
  try {
    data = JSON.parse(text);
  } catch {
    throw fail(shownPath(path), {
      code: "not-an-account",
      problem: "this is not an account",
      given: "text that is not JSON",
      ...words,
    });
  }
  const format = (data as { format?: unknown } | null)?.format;
  if (format !== ACCOUNT_FORMAT)
    throw fail(shownPath(path), {
      code: "not-an-account",
      problem: "this is not an account that this version can read",
      given: `format ${JSON.stringify(format) ?? "missing"}`,
      ...words,
    });
  return data as Account;
}

const digestOf = (text: string) => createHash("sha256").update(text, "utf8").digest("hex");

/** The pipeline file near the account: the one with the recorded digest, else one of the same name. */
function findPipeline(account: Account, folder: string): string {
  const ending = /\.(ya?ml|json)$/;
  const { sha256, name } = account.pipeline;
  const found =
    findNear(folder, LEVELS_UP, ending, (text) => digestOf(text) === sha256) ??
    findNear(folder, LEVELS_UP, ending, (text) =>
      new RegExp(
        `^"?name"?:\\s*["']?${name.replace(/[.*+?^${}()|[\]\\]/g, "\\$&")}["']?\\s*(#.*)?$`,
        "m",
      ).test(text),
    );
  if (found === null)
    throw fail(shownPath(folder), {
      code: "no-pipeline-near",
      problem: "the pipeline of this run is not to be found near the account",
      given: `pipeline ${name}, sha256 ${sha256.slice(0, 16)}…`,
      allowed: `a pipeline file in the account's folder, or up to ${LEVELS_UP} folders above and two below those`,
      todo: "name it with --pipeline FILE",
    });
  return found;
}

function software(account: Account): Check {
  const { version } = account.software;
  return {
    what: `software forebay ${version}`,
    difference: version === VERSION ? null : `this is forebay ${VERSION}`,
  };
}

function pipelineCheck(account: Account, path: string): Check {
  const text = storedText(path);
  const what = `pipeline ${shownPath(path)}`;
  if (text === null) return { what, difference: "it cannot be read" };
  if (digestOf(text) === account.pipeline.sha256) return { what, difference: null };
  const now = text.split("\n");
  const then = account.pipeline.text.split("\n");
  const line = now.findIndex((l, i) => l !== then[i]);
  const at = line < 0 ? now.length : line;
  return {
    what,
    difference: `line ${at + 1} was ${JSON.stringify(then[at] ?? "not there")}, is ${JSON.stringify(now[at] ?? "not there")}`,
  };
}

function inputs(account: Account, base: string): Check[] {
  return account.inputs.map((input) => {
    const now = storedFile(resolve(base, input.file));
    const what = `input ${input.file}`;
    if (now === null) return { what, difference: "it is not there" };
    if (now.bytes !== input.bytes)
      return { what, difference: `${input.bytes} bytes were read, it has ${now.bytes}` };
    return { what, difference: now.sha256 === input.sha256 ? null : "its bytes have changed" };
  });
}

/** The outputs as they lie beside the account. */
function stored(account: Account, folder: string): Check[] {
  return account.outputs.map((output) => {
    const now = storedFile(join(folder, output.file));
    const what = `output ${output.file} as it lies there`;
    if (now === null) return { what, difference: "it is not there" };
    return {
      what,
      difference: now.sha256 === output.sha256 ? null : "its bytes are not those that were written",
    };
  });
}

/** What must hold inside the account itself. */
function books(account: Account): Check[] {
  const rows = account.inputs.find(
    ({ rows: r }) => r.read !== r.used + r.merged + Object.values(r.set_aside).reduce((a, b) => a + b, 0),
  );
  const open = account.stages
    .flatMap((s) => Object.entries(s.channels).flatMap(([name, c]) => c.bands.map((b) => ({ s, name, b }))))
    .find(({ b }) => b.closure !== null && Math.abs(b.closure) > CLOSURE);
  return [
    {
      what: "rows read = used + merged + set aside",
      difference: rows === undefined ? null : `not for ${rows.file}`,
    },
    {
      what: "band by band, before = after + removed + cross",
      difference:
        open === undefined
          ? null
          : `stage ${open.s.place}, ${open.name}, band ${open.b.name} is off by ${open.b.closure}`,
    },
  ];
}

/** Makes the run again in a folder of its own and compares every output, the account last. */
async function again(account: Account, path: string, folder: string, pipelinePath: string): Promise<Check[]> {
  const loaded = loadPipeline(pipelinePath, shownPath(pipelinePath), STAGES);
  const { plan } = planPipeline(loaded, STAGES);
  const wanted = new Set(account.inputs.map((i) => i.file));
  const files = account.inputs.map((i) => ({ path: resolve(loaded.folder, i.file), name: i.file }));
  const found = findSeries(loaded.pipeline.logs.files, loaded.folder, loaded.folder).find(
    (s) => s.logger === account.logger,
  );
  const more = found?.files.filter((f) => !wanted.has(f.name)) ?? [];
  const name = account.outputs[0]!.file.replace(/\.clean\.csv$/, "");
  const instant = (text: string | null, open: number) => {
    const parsed = text === null ? null : parseInstant(text);
    return parsed === null || "error" in parsed ? open : parsed.us;
  };
  const scope = {
    from_us: instant(account.scope.from, Number.NEGATIVE_INFINITY),
    until_us: instant(account.scope.until, Number.POSITIVE_INFINITY),
  };
  const checks = await withTemporaryFolder(async (place) => {
    const task = {
      loaded,
      plan,
      logger: account.logger,
      files,
      folder: place,
      name,
      scope,
      version: VERSION,
    };
    await cleanSeries(task);
    const grid = await withTemporaryFolder((bare) => gridBooks(task, bare));
    const kept: Check[] =
      grid === null
        ? []
        : [{ what: `kept + removed = input at ${grid.compared} samples`, difference: grid.misfit }];
    const again = [...account.outputs.map((o) => o.file), `${name}.account.json`].map((file): Check => {
      const then = file.endsWith(".account.json") ? resolve(path) : join(folder, file);
      const what = `output ${file} made again`;
      const now = storedFile(join(place, file));
      if (now === null) return { what, difference: "it is not made any more" };
      if (storedFile(then) === null) return { what, difference: "the earlier one is not there to compare" };
      const at = firstDifference(then, join(place, file));
      return { what, difference: at === null ? null : `from byte ${at.byte}, line ${at.line} on` };
    });
    return [...again, ...kept];
  });
  return more.length === 0
    ? checks
    : [
        ...checks,
        {
          what: "logs that the pipeline names",
          difference: `${more.map((f) => f.name).join(", ")} came after the run`,
        },
      ];
}
