/**
 * The noise of the reference files: a linear congruential generator (multiplier 16807, modulus 2^31 - 1;
 * S. K. Park & K. W. Miller 1988) and near-Gaussian sums of twelve of its values, less 6.
 */
export function uniform(seed: number, n: number): Float64Array {
  const out = new Float64Array(n);
  let state = seed;
  for (let i = 0; i < n; i++) {
    out[i] = state / 2147483647;
    state = (16807 * state) % 2147483647;
  }
  return out;
}

export function nearGaussian(seed: number, n: number): Float64Array {
  const u = uniform(seed, 12 * n);
  return Float64Array.from({ length: n }, (_, i) => {
    let sum = 0;
    for (let j = 0; j < 12; j++) sum += u[12 * i + j]!;
    return sum - 6;
  });
}
