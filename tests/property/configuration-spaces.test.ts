/** Numbered spaces of configurations against plain enumeration. */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
  chargeKey,
  chargeRule,
  chargesOf,
  configurationSpace,
  dipoleRule,
  freeRule,
  totalRule,
} from '../../src/models/configuration-space.js';
import type { ConfigurationRule } from '../../src/models/configuration-space.js';
import { binomial } from '../../src/models/combinatorics.js';

const rules = fc.tuple(fc.integer({ min: 1, max: 6 }), fc.integer({ min: 1, max: 3 })).chain(([sites, levels]) =>
  fc.oneof(
    fc.constant(freeRule(sites, levels)),
    fc.nat({ max: sites * (levels - 1) }).map((total) => totalRule(sites, levels, total)),
    fc.constant(chargeRule(sites, levels, (value, site) => [value, site % 2 === 0 ? value : -value])),
    fc.boolean().map((ring) => dipoleRule(sites, levels, ring, (value) => value - 1)),
  ),
);

/** Every configuration of the site values in lexicographic order. */
function everyWord({ sites, levels }: ConfigurationRule): number[][] {
  return Array.from({ length: levels ** sites }, (_, code) =>
    Array.from({ length: sites }, (__, x) => Math.floor(code / levels ** (sites - 1 - x)) % levels),
  );
}

describe('numbering', () => {
  it('counts, orders, finds and reads back exactly the configurations of the rule', () => {
    fc.assert(
      fc.property(rules, (rule) => {
        const allowed = everyWord(rule).filter((word) => chargesOf(rule, word) !== null);
        const space = configurationSpace(rule);
        expect(space.dimension).toBe(allowed.length);
        expect(space.list()).toEqual(allowed);
        allowed.forEach((word, rank) => expect(space.rank(word)).toBe(rank));
        for (const word of everyWord(rule)) if (chargesOf(rule, word) === null) expect(space.rank(word)).toBe(-1);
      }),
      { numRuns: 60 },
    );
  });

  it('conserved numbers split a space: every configuration is in one part, and only there', () => {
    fc.assert(
      fc.property(rules, (rule) => {
        const words = configurationSpace(rule).list();
        const keys = [...new Set(words.map((word) => chargeKey(chargesOf(rule, word) ?? [])))];
        const parts = keys.map((key) => configurationSpace(rule, new Set([key])));
        expect(parts.reduce((sum, part) => sum + part.dimension, 0)).toBe(words.length);
        for (const word of words)
          expect(parts.map((part) => part.rank(word) >= 0)).toEqual(keys.map((key) => key === chargeKey(chargesOf(rule, word) ?? [])));
      }),
      { numRuns: 40 },
    );
  });

  it('draws are members, and reach the first and the last', () => {
    fc.assert(
      fc.property(
        rules,
        fc.array(fc.double({ min: 0, max: 1, maxExcluded: true, noNaN: true }), { minLength: 6, maxLength: 6 }),
        (rule, drawn) => {
          const space = configurationSpace(rule);
          if (space.dimension === 0) return;
          let next = 0;
          expect(space.rank(space.draw(() => drawn[next++] ?? 0))).toBeGreaterThanOrEqual(0);
          expect(space.rank(space.draw(() => 0))).toBe(0);
          expect(space.rank(space.draw(() => 1 - 2 ** -53))).toBe(space.dimension - 1);
        },
      ),
      { numRuns: 60 },
    );
  });
});

describe('dimensions of large spaces', () => {
  it('spins of fixed magnetisation: C(L, up), exact below 2^53', () => {
    for (const [sites, up] of [
      [24, 12],
      [40, 3],
      [50, 20],
    ])
      expect(configurationSpace(totalRule(sites, 2, up)).dimension).toBe(binomial(sites, up));
  });

  it('bosons: C(N + L − 1, N)', () => {
    expect(configurationSpace(totalRule(12, 13, 12)).dimension).toBe(1_352_078);
  });

  it('refuses more states than it can tabulate, with a code', () => {
    expect(() => configurationSpace(totalRule(3, 60_000, 59_999))).toThrow(expect.objectContaining({ code: 'point.too-large' }));
  });
});
