/**
 * How far a bin of noise may stand above the noise floor before it is called a tone.
 * An averaged spectral estimate is distributed as chi-square / nu times the density (R. B. Blackman & J. W.
 * Tukey 1958), and the median of m independent values lies at the quantile u of their distribution, u
 * distributed as Beta((m + 1) / 2, (m + 1) / 2) (H. A. David, Order Statistics, 2.1). With the floor taken as
 * the median over its own expected share b of the density, a bin exceeds T times the floor with the chance
 *   integral over u of the upper tail at T x(u) / b, x(u) the quantile of chi-square / nu at u.
 * Recalled from memory; exact for independent bins of even noise.
 */
import { chiSquareQuantile } from "./chi-square.ts";

/** Half the number of intervals of the integral; the integrand is smooth, more change nothing in 1e-9. */
const STEPS = 32;

/** Median of chi-square / dof: the share of the density that a median of estimates settles at. */
export function medianShare(dof: number): number {
  return chiSquareQuantile(0.5, dof) / dof;
}

/**
 * Ratio T of a bin to the floor that noise exceeds with the chance given.
 * @param dof         degrees of freedom of a bin, >= 1
 * @param neighbours  independent values under the median (not necessarily whole), >= 2
 * @param chance      0 < chance < 0.5
 * @param above       chance that an estimate of noise exceeds x times its density
 */
export function toneThreshold(
  dof: number,
  neighbours: number,
  chance: number,
  above: (x: number) => number,
): number {
  const c = (neighbours + 1) / 2;
  const b = medianShare(dof);
  // Over z = ln(u / (1 - u)) the density of u is e^(c z) / (1 + e^z)^(2 c), up to a constant: weights that
  // fall off as e^(-c |z|), cut off where they are far below the chance asked for.
  const end = (Math.log(1 / chance) + 14) / c + 1;
  const floors: number[] = [];
  const weights: number[] = [];
  let total = 0;
  for (let i = -STEPS; i <= STEPS; i++) {
    const z = (i / STEPS) * end;
    const weight = Math.exp(c * z - 2 * c * Math.log1p(Math.exp(z)) + 2 * c * Math.LN2);
    floors.push(chiSquareQuantile(1 / (1 + Math.exp(-z)), dof) / dof / b);
    weights.push(weight);
    total += weight;
  }
  // Against ln T the logarithm of the chance falls ever faster: false position closes in within a few steps.
  const excess = (logT: number) => {
    let sum = 0;
    for (let i = 0; i < floors.length; i++) sum += weights[i]! * above(Math.exp(logT) * floors[i]!);
    return Math.max(-800, Math.log(sum / total / chance));
  };
  let low = 0;
  let high = 0.5;
  let atLow = excess(low);
  let atHigh = excess(high);
  while (atHigh > 0) {
    low = high;
    atLow = atHigh;
    high *= 1.5;
    atHigh = excess(high);
  }
  for (let i = 0, side = 0; i < 60 && high - low > 1e-7; i++) {
    const next = low + ((high - low) * atLow) / (atLow - atHigh);
    const at = excess(next);
    if (Math.abs(at) < 1e-6) return Math.exp(next);
    // Illinois rule: an end that stays twice running counts half.
    if (at > 0) {
      low = next;
      atLow = at;
      if (side > 0) atHigh /= 2;
      side = 1;
    } else {
      high = next;
      atHigh = at;
      if (side < 0) atLow /= 2;
      side = -1;
    }
  }
  return Math.exp(high);
}
