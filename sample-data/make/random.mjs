/**
 * Random numbers that any language repeats exactly: the Lehmer generator x <- 16807 x mod (2^31 - 1)
 * (Park and Miller, 1988), made Gaussian by Box and Muller (1958).
 */
const MODULUS = 2 ** 31 - 1;

export class Random {
  constructor(seed) {
    this.state = seed;
    this.spare = null;
  }

  /** Uniform in (0, 1). */
  uniform() {
    this.state = (this.state * 16807) % MODULUS;
    return this.state / MODULUS;
  }

  /** Whole number from `from` to `to`, both included. */
  whole(from, to) {
    return from + Math.floor(this.uniform() * (to - from + 1));
  }

  /** Gaussian, mean 0, standard deviation 1. */
  gaussian() {
    if (this.spare !== null) {
      const value = this.spare;
      this.spare = null;
      return value;
    }
    const radius = Math.sqrt(-2 * Math.log(this.uniform()));
    const angle = 2 * Math.PI * this.uniform();
    this.spare = radius * Math.sin(angle);
    return radius * Math.cos(angle);
  }
}

/** Hands out row numbers, each at least `apart` rows away from all others handed out or reserved. */
export class Places {
  constructor(random, rows, apart) {
    this.random = random;
    this.rows = rows;
    this.apart = apart;
    this.taken = new Uint8Array(rows);
  }

  reserve(from, count = 1) {
    const first = Math.max(0, from - this.apart);
    this.taken.fill(1, first, Math.min(this.rows, from + count + this.apart));
  }

  /** `count` places, each the first of `length` rows; in rising order. */
  pick(count, length = 1) {
    const found = [];
    while (found.length < count) {
      const at = this.random.whole(this.apart, this.rows - this.apart - length);
      if (this.taken.subarray(at, at + length).some((x) => x === 1)) continue;
      this.reserve(at, length);
      found.push(at);
    }
    return found.sort((a, b) => a - b);
  }
}

export const iso = (ms) => new Date(ms).toISOString();
export const rms = (values) => Math.sqrt(values.reduce((sum, v) => sum + v * v, 0) / values.length);
