/** Exact numbers read from text, so that 1/360 s stays 1/360 s. */

/** Lowest terms, `den` positive, |num| * den below 2^53, so that both fit a float64 exactly. */
export interface Rational {
  readonly num: number;
  readonly den: number;
}

/** The same without a bound; for work on the way. */
export interface BigRational {
  readonly num: bigint;
  readonly den: bigint;
}

/** A decimal number as people and programs write it; the sign is read apart from it. */
export const DECIMAL = String.raw`(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?`;

const EXACT_LIMIT = 2n ** 53n;
/** Longer texts are no quantity that anyone means; the bound keeps the big integers small. */
const LONGEST_NUMBER = 40;
const LARGEST_EXPONENT = 60;

/** Reads an unsigned decimal (`2.5`, `1e-3`); null when it is none, or longer than any real quantity. */
export function readDecimal(text: string): BigRational | null {
  const match = /^(\d*)\.?(\d*)(?:[eE]([+-]?\d+))?$/.exec(text);
  if (match === null || text.length > LONGEST_NUMBER) return null;
  const [, whole = "", fraction = "", exponentText = "0"] = match;
  const exponent = Number(exponentText) - fraction.length;
  if (whole + fraction === "" || Math.abs(exponent) > LARGEST_EXPONENT) return null;
  const digits = BigInt(whole + fraction);
  return exponent >= 0
    ? { num: digits * 10n ** BigInt(exponent), den: 1n }
    : lowestTerms({ num: digits, den: 10n ** BigInt(-exponent) });
}

export function times(a: BigRational, b: BigRational): BigRational {
  return lowestTerms({ num: a.num * b.num, den: a.den * b.den });
}

/** @param r  den not zero */
export function lowestTerms({ num, den }: BigRational): BigRational {
  let a = num < 0n ? -num : num;
  let b = den < 0n ? -den : den;
  while (b !== 0n) [a, b] = [b, a % b];
  const sign = den < 0n ? -1n : 1n;
  return { num: (sign * num) / a, den: (sign * den) / a };
}

/** null when it cannot be held exactly. */
export function toRational(r: BigRational): Rational | null {
  const { num, den } = lowestTerms(r);
  const size = (num < 0n ? -num : num) * den;
  return size < EXACT_LIMIT && den < EXACT_LIMIT ? { num: Number(num), den: Number(den) } : null;
}

/** The float64 nearest to the ratio. */
export function nearestNumber({ num, den }: BigRational): number {
  if (num < 0n) return -nearestNumber({ num: -num, den });
  if (num === 0n) return 0;
  // At least 64 bits of quotient, with a sticky last bit, so that the one rounding is the right one.
  const shift = Math.max(0, 66 + bits(den) - bits(num));
  const top = num << BigInt(shift);
  const quotient = top / den;
  return Number(top % den === 0n ? quotient : quotient | 1n) * 2 ** -shift;
}

const bits = (n: bigint): number => 4 * n.toString(16).length;
