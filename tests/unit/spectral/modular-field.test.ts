import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
  inverse,
  isPrime,
  jacobi,
  multiply,
  power,
  PRIME_LIMIT,
  residue,
  splittingPrimes,
  squareRoot,
} from '../../../src/spectral/modular-field.js';

/** The largest primes below 2^26 by a table of primes (from memory: 2^26 − 5, 2^26 − 27, 2^26 − 45). */
const LARGEST = PRIME_LIMIT - 5;

const residues = fc.integer({ min: 1, max: LARGEST - 1 });

describe('arithmetic modulo a prime', () => {
  it('multiplies as big integers do, up to the largest residues', () => {
    fc.assert(
      fc.property(residues, residues, (a, b) => {
        expect(multiply(a, b, LARGEST)).toBe(Number((BigInt(a) * BigInt(b)) % BigInt(LARGEST)));
      }),
    );
    expect(multiply(LARGEST - 1, LARGEST - 1, LARGEST)).toBe(1);
  });

  it('inverts, and takes residues of negative integers', () => {
    fc.assert(
      fc.property(residues, (a) => {
        expect(multiply(a, inverse(a, LARGEST), LARGEST)).toBe(1);
      }),
    );
    expect(residue(-1n, 7)).toBe(6);
    expect(power(3, 0, 7)).toBe(1);
  });

  it('knows squares and their roots', () => {
    for (const p of [7, 13, 17, LARGEST, ...splittingPrimes([], 2)]) {
      fc.assert(
        fc.property(fc.integer({ min: 1, max: p - 1 }), (a) => {
          const square = multiply(a, a, p);
          expect(jacobi(square, p)).toBe(1);
          expect([a, p - a]).toContain(squareRoot(square, p));
          // Criterion by the power (p − 1)/2.
          expect(jacobi(a, p)).toBe(power(a, (p - 1) / 2, p) === 1 ? 1 : -1);
        }),
      );
    }
  });

  it('refuses the root of a residue that is no square', () => {
    expect(() => squareRoot(3, 7)).toThrow(expect.objectContaining({ code: 'internal.invariant' }));
  });

  it('tells primes', () => {
    expect(Array.from({ length: 30 }, (_, n) => n).filter(isPrime)).toEqual([2, 3, 5, 7, 11, 13, 17, 19, 23, 29]);
    expect([PRIME_LIMIT - 5, PRIME_LIMIT - 27, PRIME_LIMIT - 45].every(isPrime)).toBe(true);
    expect([PRIME_LIMIT - 1, PRIME_LIMIT - 3, PRIME_LIMIT - 7].some(isPrime)).toBe(false);
  });

  it('finds primes at which −1 and chosen primes are squares', () => {
    const roots = [2, 3, 5, 7, 11, 13, 17, 19, 23];
    const primes = splittingPrimes(roots, 2);
    expect(primes).toHaveLength(2);
    for (const p of primes) {
      expect(isPrime(p)).toBe(true);
      for (const square of [p - 1, ...roots]) expect(power(square, (p - 1) / 2, p)).toBe(1);
    }
  });
});
