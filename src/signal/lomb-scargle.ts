/**
 * Lomb-Scargle periodogram: least-squares fit of a sine wave at each frequency to samples at any times.
 * References: N. R. Lomb (1976), Astrophysics and Space Science 39, 447-462; J. D. Scargle (1982),
 * Astrophysical Journal 263, 835-853, eq. 10 and 11; M. Zechmeister & M. Kuerster (2009), Astronomy &
 * Astrophysics 496, 577-584, eq. 5 (with a mean of its own at each frequency). Recalled from memory.
 */

export interface Periodogram {
  /**
   * Scargle's power at each frequency, unit squared: 1/2 (A^2 / sum cos^2 + B^2 / sum sin^2). On even samples
   * at k / n cycles/sample it is |X[k]|^2 / n. A sine of amplitude a gives about n a^2 / 4.
   */
  readonly power: Float64Array;
  /** Share of the samples' sum of squares about their mean that the sine explains, 0 to 1. */
  readonly share: Float64Array;
}

/**
 * @param t            times, any order and spacing; s for frequencies in Hz
 * @param y            values; samples with a NaN are left out
 * @param frequencies  cycles per unit of t (not radians), > 0
 * @param mean         removed: the samples' mean is taken out once; fitted: a mean is fitted along with the
 *                     sine at each frequency, which is sounder where the samples cover its phases unevenly
 * @returns powers; all NaN with fewer than three samples (fitted: four), or with samples that do not vary
 *
 * Direct sums, samples times frequencies.
 */
export function lombScargle(
  t: Float64Array,
  y: Float64Array,
  frequencies: Float64Array,
  mean: "removed" | "fitted",
): Periodogram {
  const power = new Float64Array(frequencies.length).fill(Number.NaN);
  const share = new Float64Array(frequencies.length).fill(Number.NaN);
  const { times, departures, squares } = present(t, y);
  const n = times.length;
  if (n < (mean === "fitted" ? 4 : 3) || !(squares > 0)) return { power, share };
  for (const [j, f] of frequencies.entries()) {
    power[j] = (mean === "removed" ? sinePower : sineAndMeanPower)(times, departures, f) / 2;
    share[j] = (2 * power[j]!) / squares;
  }
  return { power, share };
}

/** Times from the first one on, and values about their mean. */
function present(t: Float64Array, y: Float64Array) {
  const kept = Array.from(y.keys()).filter((i) => !Number.isNaN(y[i]!) && !Number.isNaN(t[i]!));
  const first = kept[0] ?? 0;
  const times = Float64Array.from(kept, (i) => t[i]! - t[first]!);
  const departures = Float64Array.from(kept, (i) => y[i]! - y[first]!);
  const mean = departures.reduce((s, v) => s + v, 0) / Math.max(1, kept.length);
  let squares = 0;
  for (let i = 0; i < departures.length; i++) {
    departures[i]! -= mean;
    squares += departures[i]! ** 2;
  }
  return { times, departures, squares };
}

/** Phase of f t with whole turns left out, so that late times keep their digits. */
function phase(f: number, t: number): number {
  const turns = f * t;
  return 2 * Math.PI * (turns - Math.round(turns));
}

/** Sum of squares that a sine takes out of y. */
function sinePower(times: Float64Array, y: Float64Array, f: number): number {
  let [yc, ys, c2, s2, cs] = [0, 0, 0, 0, 0];
  for (let i = 0; i < times.length; i++) {
    const a = phase(f, times[i]!);
    const c = Math.cos(a);
    const s = Math.sin(a);
    yc += y[i]! * c;
    ys += y[i]! * s;
    c2 += c * c;
    s2 += s * s;
    cs += c * s;
  }
  return explained(yc, ys, c2, s2, cs);
}

/** The same with a mean fitted along: sums about their own means. */
function sineAndMeanPower(times: Float64Array, y: Float64Array, f: number): number {
  const n = times.length;
  let [c1, s1, y1, yc, ys, c2, s2, cs] = [0, 0, 0, 0, 0, 0, 0, 0];
  for (let i = 0; i < n; i++) {
    const a = phase(f, times[i]!);
    const c = Math.cos(a);
    const s = Math.sin(a);
    c1 += c;
    s1 += s;
    y1 += y[i]!;
    yc += y[i]! * c;
    ys += y[i]! * s;
    c2 += c * c;
    s2 += s * s;
    cs += c * s;
  }
  return explained(
    yc - (y1 * c1) / n,
    ys - (y1 * s1) / n,
    c2 - (c1 * c1) / n,
    s2 - (s1 * s1) / n,
    cs - (c1 * s1) / n,
  );
}

/**
 * Turned by Lomb's angle, in which sine and cosine are orthogonal on these samples: tan 2 w tau = 2 cs / (c2 - s2).
 * A direction that the samples do not show at all explains nothing.
 */
function explained(yc: number, ys: number, c2: number, s2: number, cs: number): number {
  const turn = Math.atan2(2 * cs, c2 - s2) / 2;
  const c = Math.cos(turn);
  const s = Math.sin(turn);
  const cosines = c2 * c * c + 2 * cs * c * s + s2 * s * s;
  const sines = c2 * s * s - 2 * cs * c * s + s2 * c * c;
  const least = 1e-12 * (c2 + s2);
  const along = yc * c + ys * s;
  const across = ys * c - yc * s;
  return (cosines > least ? (along * along) / cosines : 0) + (sines > least ? (across * across) / sines : 0);
}
