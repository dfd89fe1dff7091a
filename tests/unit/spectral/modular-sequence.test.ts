import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { minimalDegree } from '../../../src/spectral/modular-sequence.js';
import { splittingPrimes } from '../../../src/spectral/modular-field.js';

const P = splittingPrimes([], 1)[0];

/** Σ weight·level^k: a sequence whose shortest recurrence has one root a level. */
function* powers(levels: readonly number[], weights: readonly number[]): Generator<number> {
  const terms = weights.map(BigInt);
  for (;;) {
    yield Number(terms.reduce((sum, term) => sum + term, 0n) % BigInt(P));
    levels.forEach((level, k) => (terms[k] = (terms[k] * BigInt(level)) % BigInt(P)));
  }
}

describe('minimalDegree', () => {
  it('is the number of distinct levels with weight, zero among them', () => {
    const levels = fc.uniqueArray(fc.nat(P - 1), { minLength: 1, maxLength: 12 });
    fc.assert(
      fc.property(levels, fc.integer({ min: 1, max: P - 1 }), (all, weight) => {
        const weights = all.map((_, k) => ((weight * (k + 1)) % (P - 1)) + 1);
        expect(minimalDegree(powers(all, weights), all.length + 5, P)).toBe(all.length);
      }),
    );
    expect(minimalDegree(powers([0, 3, 3, 9], [5, 1, 1, 2]), 20, P)).toBe(3);
  });

  it('is known for small sequences', () => {
    const fibonacci = (function* () {
      for (let [a, b] = [0, 1]; ; [a, b] = [b, (a + b) % P]) yield a;
    })();
    expect(minimalDegree(fibonacci, 10, P)).toBe(2);
    const cubes = (function* () {
      for (let k = 0; ; k += 1) yield k ** 3 % P;
    })();
    expect(minimalDegree(cubes, 10, P)).toBe(4);
    expect(minimalDegree(powers([], []), 10, P)).toBe(0);
  });

  it('never exceeds the bound of the degree', () => {
    expect(minimalDegree(powers([1, 2, 3, 4], [1, 1, 1, 1]), 4, P)).toBe(4);
  });
});
