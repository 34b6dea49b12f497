import type { PlannedStage } from "../pipeline/plan-types.ts";
import { foldedFrequency } from "../signal/fold.ts";
import { gainAtBins } from "../signal/gain-at-bins.ts";
import type { GridBlock } from "../signal/grid-block.ts";
import type { SpectrumPlan } from "../signal/welch.ts";
import type { IndexRange } from "./index-range.ts";
import { NodeSpectra } from "./node-spectra.ts";

/** What folds into the band kept, on the data. */
export interface AliasMeasure {
  /** Worst ratio over the bands of power that folds in to power that belongs there. */
  readonly ratio_dB: number;
  readonly band: { readonly from_Hz: number; readonly to_Hz: number };
  /** The frequency that brings most of it, and where it lands. */
  readonly source_Hz: number;
  readonly landsAt_Hz: number;
}

const MOST_BANDS = 16;
/** Bins that a band needs at least: a band narrower than a bin may hold what folds and not what belongs there. */
const BINS_A_BAND = 4;
/**
 * A band that holds next to nothing is judged against this share of the whole band kept: what folds there
 * 60 dB below nothing is still nothing.
 */
const LEAST_SHARE = 1e-8;

/**
 * Power on the stage's input that would fold into the band kept, after the stage's own filter |H|^2.
 * The spectrum is measured before the filter, where the data have all their rate; what the filter leaves
 * of it follows from |H|^2 exactly, so that only the samples kept need be computed.
 */
export class AliasSpectrum {
  private readonly node: NodeSpectra;
  private readonly planned: PlannedStage;
  private readonly power: Float64Array;
  private segments = 0;

  constructor(plan: SpectrumPlan, planned: PlannedStage, range: IndexRange) {
    this.node = new NodeSpectra(plan, 0, range);
    this.planned = planned;
    this.power = new Float64Array(plan.bins);
    this.node.listen((_, spectrum) => {
      if (spectrum === null) return;
      for (let k = 0; k < this.power.length; k++)
        this.power[k]! += spectrum.re[k]! * spectrum.re[k]! + spectrum.im[k]! * spectrum.im[k]!;
      this.segments++;
    });
  }

  push(block: GridBlock): void {
    this.node.push(block);
  }

  /** null when the record has no gap-free segment, one too short to resolve the band kept, or nothing to measure. */
  measure(): AliasMeasure | null {
    const { plan } = this.node;
    const alias = this.planned.design.alias;
    if (this.segments === 0 || alias === null) return null;
    const rate = plan.frequency(plan.segment);
    const newRate = rate / this.planned.design.keepEvery;
    const { taps } = this.planned.design;
    const gain = taps === null ? null : gainAtBins(taps, plan.segment);
    // Bins 1 and up lie in the band kept. A record so short that it shows none there cannot be judged.
    const binsKept = Math.floor(alias.keptTo_Hz / plan.resolution_Hz);
    if (binsKept < 1) return null;
    const bands = Math.max(1, Math.min(MOST_BANDS, Math.floor(binsKept / BINS_A_BAND)));
    const width = alias.keptTo_Hz / bands;
    const kept = new Float64Array(bands);
    const folded = new Float64Array(bands);
    const worst = new Float64Array(bands);
    const source = new Float64Array(bands);
    // Bin 0 is what is left of the mean after each segment's own was taken out.
    for (let k = 1; k < plan.bins; k++) {
      const f = plan.frequency(k);
      const edge = k === plan.bins - 1 ? 1 : 2;
      const p = edge * this.power[k]! * (gain === null ? 1 : gain[k]! ** 2);
      const home = f <= newRate / 2 ? f : foldedFrequency(f, newRate).frequency;
      const band = Math.min(bands - 1, Math.floor(home / width));
      if (home > alias.keptTo_Hz) continue;
      if (home === f) kept[band]! += p;
      else {
        folded[band]! += p;
        if (p > worst[band]!) {
          worst[band] = p;
          source[band] = f;
        }
      }
    }
    const least = LEAST_SHARE * kept.reduce((sum, p) => sum + p, 0);
    let at = -1;
    let ratio = 0;
    for (let b = 0; b < bands; b++) {
      const reference = Math.max(kept[b]!, least);
      const r = folded[b]! / reference;
      if (reference > 0 && r > ratio) {
        ratio = r;
        at = b;
      } else if (reference === 0 && folded[b]! > 0) {
        ratio = Number.POSITIVE_INFINITY;
        at = b;
      }
    }
    if (at < 0) return null;
    return {
      ratio_dB: 10 * Math.log10(ratio),
      band: { from_Hz: at * width, to_Hz: (at + 1) * width },
      source_Hz: source[at]!,
      landsAt_Hz: foldedFrequency(source[at]!, newRate).frequency,
    };
  }
}
