/**
 * Arithmetic modulo a prime below 2^26, in double precision: a product of two residues is below 2^52 and exact, and so is its quotient by
 * the prime once rounded down, because a true quotient that is no integer is at least 2^-26 away from one.
 *
 * Residues are 0 … p − 1.
 */
import { WindrowError } from '../core/errors.js';

/** Primes are below this. */
export const PRIME_LIMIT = 2 ** 26;

export const multiply = (a: number, b: number, p: number): number => {
  const product = a * b;
  return product - Math.floor(product / p) * p;
};

export function power(base: number, exponent: number, p: number): number {
  let result = 1;
  let square = base % p;
  for (let rest = exponent; rest > 0; rest = Math.floor(rest / 2)) {
    if (rest % 2 === 1) result = multiply(result, square, p);
    square = multiply(square, square, p);
  }
  return result;
}

/** Of a residue that is not 0 (Fermat's little theorem). */
export const inverse = (a: number, p: number): number => power(a, p - 2, p);

export function residue(value: bigint, p: number): number {
  const rest = Number(value % BigInt(p));
  return rest < 0 ? rest + p : rest;
}

/** Jacobi symbol (a/n) of odd n > 0 by quadratic reciprocity: 1 for every square modulo a prime n that does not divide it. */
export function jacobi(a: number, n: number): number {
  let top = a % n;
  let bottom = n;
  let sign = 1;
  while (top !== 0) {
    while (top % 2 === 0) {
      top /= 2;
      if (bottom % 8 === 3 || bottom % 8 === 5) sign = -sign;
    }
    [top, bottom] = [bottom, top];
    if (top % 4 === 3 && bottom % 4 === 3) sign = -sign;
    top %= bottom;
  }
  return bottom === 1 ? sign : 0;
}

/**
 * A square root of a square modulo p, by the algorithm of Tonelli and Shanks (common practice).
 * @throws WindrowError internal.invariant for a residue that is no square
 */
export function squareRoot(a: number, p: number): number {
  if (jacobi(a, p) !== 1) throw new WindrowError('internal.invariant', 'a residue without a square root', { found: `${a} modulo ${p}` });
  let odd = p - 1;
  let twos = 0;
  for (; odd % 2 === 0; odd /= 2) twos += 1;
  let nonSquare = 2;
  while (jacobi(nonSquare, p) !== -1) nonSquare += 1;
  let generator = power(nonSquare, odd, p);
  let root = power(a, (odd + 1) / 2, p);
  let rest = power(a, odd, p);
  while (rest !== 1) {
    let order = 0;
    for (let t = rest; t !== 1; t = multiply(t, t, p)) order += 1;
    let factor = generator;
    for (let k = twos - order - 1; k > 0; k -= 1) factor = multiply(factor, factor, p);
    root = multiply(root, factor, p);
    generator = multiply(factor, factor, p);
    rest = multiply(rest, generator, p);
    twos = order;
  }
  return root;
}

export function isPrime(n: number): boolean {
  if (n < 4) return n > 1;
  if (n % 2 === 0) return false;
  for (let d = 3; d * d <= n; d += 2) if (n % d === 0) return false;
  return true;
}

/**
 * The largest primes below 2^26 modulo which −1 and all of these primes are squares; fewer where there are not enough. Each prime in the
 * list halves their number: some 20 are still found.
 */
export function splittingPrimes(squares: readonly number[], count: number): number[] {
  const found: number[] = [];
  // −1 and 2 are squares modulo p = 1 mod 8.
  for (let p = PRIME_LIMIT - 7; p > PRIME_LIMIT / 2 && found.length < count; p -= 8) {
    if (squares.every((square) => jacobi(square, p) === 1) && isPrime(p)) found.push(p);
  }
  return found;
}
