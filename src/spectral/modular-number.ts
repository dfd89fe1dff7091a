/**
 * Numbers of a Hamiltonian read back exactly: rationals, and square roots of rationals, from the doubles that were computed from them.
 *
 * A double is taken for a fraction only where a random number would come as close to one of so small a denominator with a probability
 * below 10^-4. Anything else stands for itself, as the shortest decimal of its double: equal doubles stay equal, and no more is known.
 */

/** (numerator/denominator)·√radicand, the radicand a product of distinct primes of `PRIMES`, one bit each. */
export interface ExactNumber {
  readonly numerator: bigint;
  readonly denominator: bigint;
  readonly radicand: bigint;
  /** false where the number was recognised as none and stands for its double */
  readonly recognised: boolean;
}

const LARGEST_PRIME = 4096;

function primesUpTo(limit: number): number[] {
  const composite = new Uint8Array(limit + 1);
  const primes: number[] = [];
  for (let n = 2; n <= limit; n += 1) {
    if (composite[n] === 1) continue;
    primes.push(n);
    for (let m = n * n; m <= limit; m += n) composite[m] = 1;
  }
  return primes;
}

/** What a radicand may be made of. */
export const PRIMES: readonly number[] = primesUpTo(LARGEST_PRIME);

/** The primes of a radicand. */
export function primesOf(radicand: bigint): number[] {
  const found: number[] = [];
  for (let rest = radicand, k = 0; rest > 0n; rest >>= 1n, k += 1) if ((rest & 1n) === 1n) found.push(PRIMES[k]);
  return found;
}

const CHANCE = 1e-4;

/** The first convergent of a continued fraction within the tolerance, if its denominator is small enough to mean something. */
function fraction(value: number, tolerance: number): { readonly numerator: number; readonly denominator: number } | null {
  const size = Math.abs(value);
  let [p0, p1, q0, q1] = [0, 1, 1, 0];
  let rest = size;
  for (;;) {
    const whole = Math.floor(rest);
    [p0, p1] = [p1, whole * p1 + p0];
    [q0, q1] = [q1, whole * q1 + q0];
    // Written so that an overflow ends the search, too.
    if (!(q1 * q1 * tolerance <= CHANCE && p1 <= Number.MAX_SAFE_INTEGER)) return null;
    if (Math.abs(size - p1 / q1) <= tolerance) return { numerator: value < 0 ? -p1 : p1, denominator: q1 };
    rest = 1 / (rest - whole);
  }
}

/** √(numerator/denominator) with the squares taken out; null where a prime factor is too large to be tabulated. */
function rootOf(numerator: number, denominator: number): ExactNumber | null {
  let outside = 1n;
  let radicand = 0n;
  for (const part of [numerator, denominator]) {
    let rest = part;
    PRIMES.forEach((prime, k) => {
      for (; rest % prime === 0; rest /= prime) {
        const bit = 1n << BigInt(k);
        if ((radicand & bit) !== 0n) outside *= BigInt(prime);
        radicand ^= bit;
      }
    });
    if (rest !== 1) return null;
  }
  return { numerator: outside, denominator: BigInt(denominator), radicand, recognised: true };
}

/** The shortest decimal that stands for a double. */
function decimalOf(value: number, recognised: boolean): ExactNumber {
  const [, sign, whole, part = '', exponent = '0'] = /^(-?)(\d+)(?:\.(\d+))?(?:e([+-]\d+))?$/.exec(String(value))!;
  const shift = Number(exponent) - part.length;
  const digits = BigInt(`${sign}${whole}${part}`);
  const [numerator, denominator] = shift >= 0 ? [digits * 10n ** BigInt(shift), 1n] : [digits, 10n ** BigInt(-shift)];
  return { numerator, denominator, radicand: 0n, recognised };
}

/** A number as a person wrote it: a simple fraction that came out of a division, else the decimal itself. */
export function exactDecimal(value: number): ExactNumber {
  const found = fraction(value, Math.abs(value) * Number.EPSILON);
  if (found === null) return decimalOf(value, true);
  return { numerator: BigInt(found.numerator), denominator: BigInt(found.denominator), radicand: 0n, recognised: true };
}

/**
 * A number that was computed.
 * @param noise absolute rounding error it may carry
 */
export function exactNumber(value: number, noise: number): ExactNumber {
  const tolerance = Math.max(noise, Math.abs(value) * 4 * Number.EPSILON);
  const plain = fraction(value, tolerance);
  if (plain !== null) return { numerator: BigInt(plain.numerator), denominator: BigInt(plain.denominator), radicand: 0n, recognised: true };
  const squared = fraction(value * value, 2.5 * Math.abs(value) * tolerance);
  const root = squared === null ? null : rootOf(squared.numerator, squared.denominator);
  if (root === null) return decimalOf(value, false);
  return value < 0 ? { ...root, numerator: -root.numerator } : root;
}
