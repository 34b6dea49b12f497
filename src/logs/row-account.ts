import type { RowAccount } from "./rows.ts";

/** How many line numbers are kept for each reason. */
const LINES_KEPT = 5;

export function newRowAccount(channels: number): RowAccount {
  return {
    read: 0,
    used: 0,
    merged: 0,
    setAside: new Map(),
    reordered: { count: 0, firstLines: [] },
    missingCells: new Array<number>(channels).fill(0),
    unreadableCells: Array.from({ length: channels }, () => ({ count: 0, firstLines: [] })),
  };
}

/** Counts a line and keeps it if it is among the first few, in whatever order the lines come. */
export function noteLine(tally: { count: number; readonly firstLines: number[] }, line: number): void {
  tally.count++;
  const lines = tally.firstLines;
  if (lines.length === LINES_KEPT) {
    if (line >= lines[LINES_KEPT - 1]!) return;
    lines.pop();
  }
  let at = lines.length;
  while (at > 0 && lines[at - 1]! > line) at--;
  lines.splice(at, 0, line);
}

/** Sets one row aside; the caller has counted it as read. */
export function setAside(account: RowAccount, reason: string, line: number): void {
  let tally = account.setAside.get(reason);
  if (tally === undefined) account.setAside.set(reason, (tally = { count: 0, firstLines: [] }));
  noteLine(tally, line);
}
