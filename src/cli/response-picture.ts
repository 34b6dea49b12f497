/** A response as a picture of plain characters, for a terminal of 80 columns. */
import type { StageAccount } from "../report/account-format.ts";
import { figure, frequencyText } from "./text.ts";

const COLUMNS = 64;
const ROW_dB = 10;
const DEEPEST_dB = -120;

/** Gain in dB against frequency, 0 to the Nyquist frequency of the stage's input; empty without a filter. */
export function responsePicture(stage: StageAccount): string[] {
  const { response } = stage;
  if (response === null) return [];
  const { frequency_Hz: f, gain_dB: g } = response;
  // Ripple above the top line is drawn on it.
  const top = Math.max(0, Math.ceil((Math.max(...g) - 1) / ROW_dB) * ROW_dB);
  const low = Math.min(-20, Math.max(DEEPEST_dB, Math.floor(Math.min(...g) / 20) * 20));
  const rows = (top - low) / ROW_dB;
  // Each column holds a stretch of frequency: from the lowest to the highest gain in it.
  const columns = Array.from({ length: COLUMNS }, (_, c) => {
    const from = Math.floor((c * (f.length - 1)) / COLUMNS);
    const to = Math.max(from + 1, Math.ceil(((c + 1) * (f.length - 1)) / COLUMNS));
    const part = g.slice(from, to + 1);
    return { high: Math.max(...part), low: Math.min(...part) };
  });
  const lines: string[] = [];
  for (let r = 0; r < rows; r++) {
    const ceiling = r === 0 ? Number.POSITIVE_INFINITY : top - r * ROW_dB;
    const floor = top - (r + 1) * ROW_dB;
    const cells = columns.map((c) => {
      const reaches = c.high > floor && (c.low <= ceiling || r === 0);
      if (!reaches) return c.high <= floor && r === rows - 1 && c.high <= low ? "." : " ";
      return c.high > floor && c.high <= ceiling ? "*" : "|";
    });
    const label = r % 2 === 0 ? figure(top - r * ROW_dB, 3).padStart(5) : "     ";
    lines.push(`  ${label} ${r % 2 === 0 ? "+" : "|"}${cells.join("").trimEnd()}`);
  }
  const end = frequencyText(f.at(-1), false);
  const middle = frequencyText(f.at(-1)! / 2, false);
  const axis = "0".padEnd(COLUMNS / 2 - Math.floor(middle.length / 2)) + middle;
  lines.push(`  ${figure(low, 3).padStart(5)} +${"-".repeat(COLUMNS)}`);
  lines.push(`     dB  ${axis.padEnd(COLUMNS - end.length)}${end}`);
  return lines;
}
