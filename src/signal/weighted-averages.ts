/**
 * Published centred weighted averages, by name.
 * References: J. Spencer (1904), Journal of the Institute of Actuaries 38, 334-343 (15 and 21 points); R. Henderson
 * (1916), Transactions of the Actuarial Society of America 17, 43-48 (closed formula); means of means, such as the
 * centred annual mean 2x12: M. G. Kendall & A. Stuart (1966), The Advanced Theory of Statistics 3, section 46.
 * Recalled from memory; Spencer's confirmed by their factors, [4][4][5][-3, 3, 4, 3, -3] / 320 and
 * [5][5][7][-1, 0, 1, 2, 1, 0, -1] / 350, where [k] sums k neighbours.
 */

/** Names and what each keeps unchanged, for help and diagnostics; henderson-N and AxB stand for families. */
export const WEIGHTED_AVERAGES: readonly { readonly name: string; readonly about: string }[] = [
  { name: "spencer-15", about: "Spencer's 15 points: keeps cubics, removes periods of 4 and 5 samples." },
  { name: "spencer-21", about: "Spencer's 21 points: keeps cubics, removes periods of 5 and 7 samples." },
  {
    name: "henderson-13",
    about: "Henderson's weights of any odd length from 5 to 1001: keep cubics, smoothest for their length.",
  },
  {
    name: "2x12",
    about:
      "Mean of 2 means of 12 (any two numbers from 2 to 1000): keeps straight lines, removes a period of 12 samples.",
  },
];

const LONGEST = 1001;
const LONGEST_MEAN = 1000;

/** Weights that add up to 1, exactly symmetric; null for a name that is not known. */
export function weightedAverage(name: string): Float64Array | null {
  if (name === "spencer-15") return scaled(convolve([-3, 3, 4, 3, -3], [4, 4, 5]), 320);
  if (name === "spencer-21") return scaled(convolve([-1, 0, 1, 2, 1, 0, -1], [5, 5, 7]), 350);
  const henderson = /^henderson-([1-9]\d*)$/.exec(name);
  if (henderson !== null) {
    const n = Number(henderson[1]);
    return n % 2 === 1 && n >= 5 && n <= LONGEST ? hendersonWeights(n) : null;
  }
  const means = /^([1-9]\d*)x([1-9]\d*)$/.exec(name);
  if (means !== null) {
    const [a, b] = [Number(means[1]), Number(means[2])];
    const known = (k: number) => k >= 2 && k <= LONGEST_MEAN;
    return known(a) && known(b) ? scaled(convolve([1], [a, b]), a * b) : null;
  }
  return null;
}

/**
 * Henderson's weights of odd length n: of all weights that keep cubics, those whose third differences have the
 * smallest sum of squares. With m = (n + 3) / 2 and j from the centre,
 * w = 315 ((m-1)^2 - j^2) (m^2 - j^2) ((m+1)^2 - j^2) (3 m^2 - 16 - 11 j^2) / (8 m (m^2-1) (4m^2-1) (4m^2-9) (4m^2-25)).
 */
export function hendersonWeights(n: number): Float64Array {
  if (!(Number.isInteger(n) && n % 2 === 1 && n >= 5))
    throw new RangeError(`no Henderson weights of ${n} points`);
  const m = (n + 3) / 2;
  const s = m * m;
  const below = 8 * m * (s - 1) * (4 * s - 1) * (4 * s - 9) * (4 * s - 25);
  return new Float64Array(n).map((_, i) => {
    const q = (i - (n - 1) / 2) ** 2;
    return (315 * ((m - 1) ** 2 - q) * (s - q) * ((m + 1) ** 2 - q) * (3 * s - 16 - 11 * q)) / below + 0;
  });
}

/** Whole-number weights, convolved with runs of ones of the lengths given. */
function convolve(start: readonly number[], runs: readonly number[]): number[] {
  let w = [...start];
  for (const run of runs) {
    const next = new Array<number>(w.length + run - 1).fill(0);
    for (const [i, x] of w.entries()) for (let k = 0; k < run; k++) next[i + k]! += x;
    w = next;
  }
  return w;
}

/** The weights by one division each, so that they are the nearest doubles to the published fractions. */
const scaled = (whole: readonly number[], by: number): Float64Array =>
  Float64Array.from(whole, (x) => x / by);
