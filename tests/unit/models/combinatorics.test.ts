import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { binomial } from '../../../src/models/combinatorics.js';

describe('binomial', () => {
  it('obeys the recurrence of Pascal’s triangle exactly below 2^53', () => {
    fc.assert(
      fc.property(fc.integer({ min: 1, max: 55 }), fc.integer({ min: 0, max: 55 }), (n, k) => {
        expect(binomial(n, k)).toBe(binomial(n - 1, k - 1) + binomial(n - 1, k));
      }),
    );
  });

  it('is 0 outside the triangle and infinite past double precision', () => {
    expect([binomial(4, -1), binomial(4, 5), binomial(0, 0), binomial(7, 7)]).toEqual([0, 0, 1, 1]);
    expect(binomial(2000, 1000)).toBe(Infinity);
  });
});
