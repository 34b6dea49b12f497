/**
 * What forebay says when something that it was given cannot be used.
 * Every diagnostic names the place, what stood there, what is allowed and what to do.
 */
export interface Diagnostic {
  /** Stable short name of the kind of mistake, lower-case with dashes; tests provoke each one by it. */
  readonly code: string;
  readonly severity: "error" | "warning";
  /** Path as the reader should see it: relative to where the command was given. */
  readonly file: string;
  /** 1-based; 0 when the matter has no place inside the file. */
  readonly line: number;
  readonly column: number;
  /** One sentence without the place: what is wrong. */
  readonly problem: string;
  /** What stood there, already shortened to something that fits a line. */
  readonly given?: string;
  readonly allowed?: string;
  /** What to do about it. */
  readonly todo?: string;
}

/** Longest text quoted back from a file; a gigantic cell or binary junk is never echoed whole. */
const QUOTE_LIMIT = 60;

/** Shows text from a file on one line: control characters replaced, at most 60 characters kept. */
export function quoted(text: string): string {
  const clean = text.replace(/[\p{Cc}\p{Cf}\u2028\u2029]/gu, "\u00b7");
  return clean.length <= QUOTE_LIMIT ? clean : `${clean.slice(0, QUOTE_LIMIT - 1)}\u2026`;
}

/** `file:line:column: what is wrong`, then the labelled lines `given`, `allowed`, `do`. */
export function renderDiagnostic(d: Diagnostic): string {
  const place = d.line > 0 ? `${d.file}:${d.line}:${Math.max(1, d.column)}` : d.file;
  const lines = [`${place}: ${d.severity === "warning" ? "warning: " : ""}${d.problem}`];
  if (d.given !== undefined) lines.push(`  given    ${d.given}`);
  if (d.allowed !== undefined) lines.push(`  allowed  ${d.allowed}`);
  if (d.todo !== undefined) lines.push(`  do       ${d.todo}`);
  return lines.join("\n");
}

/** Thrown where work cannot go on; carries diagnostics instead of a stack for the reader. */
export class DiagnosticError extends Error {
  readonly diagnostics: readonly Diagnostic[];
  constructor(diagnostics: readonly Diagnostic[]) {
    super(diagnostics.map(renderDiagnostic).join("\n"));
    this.name = "DiagnosticError";
    this.diagnostics = diagnostics;
  }
}

/** The known name that differs least from the one given (edit distance up to a third of its length). */
export function nearestName(given: string, known: readonly string[]): string | undefined {
  let best: string | undefined;
  let bestDistance = Math.max(2, Math.floor(given.length / 3)) + 1;
  for (const name of known) {
    const distance = editDistance(given.toLowerCase(), name.toLowerCase());
    if (distance < bestDistance) {
      best = name;
      bestDistance = distance;
    }
  }
  return best;
}

function editDistance(a: string, b: string): number {
  let before = Array.from({ length: b.length + 1 }, (_, j) => j);
  for (let i = 1; i <= a.length; i++) {
    const row = [i];
    for (let j = 1; j <= b.length; j++) {
      const swap = before[j - 1]! + (a[i - 1] === b[j - 1] ? 0 : 1);
      row.push(Math.min(swap, before[j]! + 1, row[j - 1]! + 1));
    }
    before = row;
  }
  return before[b.length]!;
}
