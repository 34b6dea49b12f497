import type { GridBlock } from "../../src/signal/grid-block.ts";
import { MISSING } from "../../src/signal/marks.ts";
import { WindowKernel, type WindowOptions } from "../../src/signal/window-kernel.ts";

/** Outputs of a window over one record, by their index. */
export function slide(
  x: readonly (number | null)[],
  options: Partial<WindowOptions> & Pick<WindowOptions, "taps" | "after">,
  first = 0,
): Map<number, number> {
  const kernel = new WindowKernel({
    ends: "blank",
    coverage: 1,
    keepEvery: 1,
    equal: false,
    betweenSamples: false,
    ...options,
  });
  const values = Float64Array.from(x, (v) => v ?? Number.NaN);
  const marks = Uint8Array.from(values, (v) => (Number.isNaN(v) ? MISSING : 0));
  const out = new Map<number, number>();
  const take = (b: GridBlock) => b.values.forEach((v, i) => out.set(b.first + i, v));
  kernel.push({ first, values, marks }, take);
  kernel.flush(take);
  return out;
}

/** So many zeros on either side. */
export const amongZeros = (x: readonly number[], before: number, after: number): number[] => [
  ...new Array<number>(before).fill(0),
  ...x,
  ...new Array<number>(after).fill(0),
];
