/** The ledger of a comparison: verdicts, counts, the gravest differences. Expectations are by construction; no outside numbers. */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { comparisonLedger } from '../../../src/sweep/ledger.js';

const place = { coordinates: { coupling: 1 }, question: null };

describe('the verdict', () => {
  it.each([
    [1, 1, 'identical'],
    [0.1 + 0.2, 0.3, 'within'],
    [0, -0, 'within'],
    [1, 1 + 1e-8, 'beyond'],
    [1e-20, 2e-20, 'within'],
    [1e6, 1e6 + 1e-4, 'within'],
    [null, null, 'identical'],
    [null, 0, 'beyond'],
    [Infinity, Infinity, 'identical'],
    [NaN, NaN, 'identical'],
    [NaN, null, 'beyond'],
    [NaN, 1, 'beyond'],
    [Infinity, 1, 'beyond'],
    ['weights', 'weights', 'identical'],
    ['weights', 'modular', 'beyond'],
    [['doubtful'], ['doubtful'], 'identical'],
    [['doubtful'], [], 'beyond'],
  ] as const)('on %j and %j is %s', (a, b, verdict) => {
    const ledger = comparisonLedger(1e-9);
    ledger.add(place, 'x', a, b);
    ledger.add(place, 'x', b, a);
    expect(ledger.result()).toMatchObject({ compared: 2, [verdict]: 2 });
  });

  it('is the same in both directions and identical only for the same bits', () => {
    const any = fc.oneof(fc.double(), fc.constant(0.1), fc.constant(1));
    fc.assert(
      fc.property(any, any, (a, b) => {
        const [one, other] = [comparisonLedger(1e-6), comparisonLedger(1e-6)];
        one.add(place, 'x', a, b);
        other.add(place, 'x', b, a);
        const { identical, within, beyond } = one.result();
        expect({ identical, within, beyond }).toEqual((({ identical, within, beyond }) => ({ identical, within, beyond }))(other.result()));
        expect(identical === 1).toBe(Object.is(a, b));
      }),
    );
  });

  it('of arrays names the element that differs most, and lengths that differ', () => {
    const ledger = comparisonLedger(1e-9);
    ledger.addArray(place, 'weights', Float64Array.of(1, 2, 3), Float64Array.of(1, 2.1, 4));
    ledger.addArray(place, 'energies', Float64Array.of(1, 2), Float64Array.of(1));
    ledger.addArray(place, 'overlapIm', null, null);
    ledger.addArray(place, 'overlapIm', null, Float64Array.of(1));
    const { compared, identical, beyond, differences } = ledger.result();
    expect({ compared, identical, beyond }).toEqual({ compared: 5, identical: 1, beyond: 4 });
    expect(differences.map(({ field, a, b }) => [field, a, b])).toEqual([
      ['energies', '2 values', '1 values'],
      ['overlapIm', 'no values', '1 values'],
      ['weights[2]', 3, 4],
    ]);
  });

  it('keeps the gravest differences of many', () => {
    const ledger = comparisonLedger(1e-9, 3);
    for (let i = 1; i <= 100; i++) ledger.add(place, `f${i}`, 1, 1 + i / 1000);
    expect(ledger.result().differences.map(({ field }) => field)).toEqual(['f100', 'f99', 'f98']);
  });
});
