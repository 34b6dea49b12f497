/** What a row stage (calibrate, screen) did, channel by channel: counts by reason, and the first values it kept out. */
import type { StageAccount } from "./account-format.ts";
import { anchor, htmlTable } from "./html.ts";
import { count, number, timeForPeople, withUnit } from "./text.ts";

interface Listed {
  readonly time: string;
  readonly value: number;
  readonly reason: string;
}

interface RowNotes {
  readonly unit: string;
  readonly rejected: Record<string, number>;
  readonly suspect: Record<string, number>;
  readonly first_rejected: readonly Listed[];
  readonly first_suspect: readonly Listed[];
  readonly rows_changed?: number;
  readonly range_before?: readonly [number, number] | null;
  readonly range_after?: readonly [number, number] | null;
}

/** What a row stage found, by channel; empty for other stages. */
export function rowNotes(stage: StageAccount): [string, RowNotes][] {
  return Object.entries((stage.notes["rows"] ?? {}) as Record<string, RowNotes>);
}

export function rowFindings(stage: StageAccount): string {
  return rowNotes(stage)
    .map(([name, n]) => {
      const id = anchor("rows", stage.place, name);
      const range = (r: readonly [number, number] | null | undefined) =>
        r === null || r === undefined ? "–" : `${number(r[0], 6)} to ${number(r[1], 6)}`;
      const changed = n.rows_changed === undefined ? [] : [["rows changed", count(n.rows_changed)]];
      const ranges =
        n.range_before === undefined
          ? []
          : [
              ["range before", range(n.range_before)],
              ["range after", range(n.range_after)],
            ];
      const reasons = [
        ...Object.entries(n.rejected).map(([reason, k]) => [`rejected: ${reason}`, count(k)]),
        ...Object.entries(n.suspect).map(([reason, k]) => [`suspect: ${reason}`, count(k)]),
      ];
      const listed = [...n.first_rejected, ...n.first_suspect];
      return (
        htmlTable(`t-${id}`, `${name}: rows`, ["finding", "rows"], [...changed, ...ranges, ...reasons]) +
        (listed.length === 0
          ? ""
          : htmlTable(
              `t-${id}-values`,
              `${name}: first values kept out or doubted, as they stood in the log`,
              ["time", "value", "reason"],
              listed.map((v) => [timeForPeople(v.time), withUnit(v.value, n.unit, 6), v.reason]),
            ))
      );
    })
    .join("");
}
