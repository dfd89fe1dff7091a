import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { exactDecimal, exactNumber, primesOf } from '../../../src/spectral/modular-number.js';

const show = ({ numerator, denominator, radicand }: ReturnType<typeof exactNumber>): string =>
  `${numerator}/${denominator} √${primesOf(radicand).reduce((product, prime) => product * prime, 1)}`;

const gcd = (a: number, b: number): number => (b === 0 ? a : gcd(b, a % b));

describe('exactDecimal', () => {
  it('takes a number as it is written, or as the fraction it was divided from', () => {
    expect(show(exactDecimal(0.1))).toBe('1/10 √1');
    expect(show(exactDecimal(-2.5))).toBe('-5/2 √1');
    expect(show(exactDecimal(1 / 3))).toBe('1/3 √1');
    expect(show(exactDecimal(1.2345678901234))).toBe('12345678901234/10000000000000 √1');
    expect(show(exactDecimal(1.5e300))).toMatch(/^150{299}\/1 √1$/);
    expect(show(exactDecimal(2.34567890123e-7))).toBe('234567890123/1000000000000000000 √1');
  });

  it('is the very double again', () => {
    fc.assert(
      fc.property(fc.double({ min: -1e6, max: 1e6, noNaN: true }), (value) => {
        const { numerator, denominator } = exactDecimal(value);
        if (Math.abs(value) > 1e-200)
          expect(Math.abs(Number(numerator) / Number(denominator) - value)).toBeLessThanOrEqual(3e-16 * Math.abs(value));
      }),
    );
  });
});

describe('exactNumber', () => {
  it('finds fractions and square roots of fractions', () => {
    const part = fc.integer({ min: 1, max: 200 });
    fc.assert(
      fc.property(part, part, fc.boolean(), (a, b, rooted) => {
        const common = gcd(a, b);
        const found = exactNumber(-(rooted ? Math.sqrt(a / b) : a / b), 0);
        expect(found.recognised).toBe(true);
        const squared = found.numerator ** 2n * primesOf(found.radicand).reduce((product, prime) => product * BigInt(prime), 1n);
        const [x, y] = rooted ? [a / common, b / common] : [(a / common) ** 2, (b / common) ** 2];
        expect(squared * BigInt(y)).toBe(BigInt(x) * found.denominator ** 2n);
        expect(found.numerator).toBeLessThan(0n);
      }),
    );
  });

  it('sees through rounding, not through what is larger', () => {
    expect(show(exactNumber(0.1 + 0.2, 1e-15))).toBe('3/10 √1');
    expect(exactNumber(1 / 3 + 1e-12, 1e-15).recognised).toBe(false);
    expect(show(exactNumber(1e-17, 1e-15))).toBe('0/1 √1');
  });

  it('leaves other numbers as they are', () => {
    for (const value of [Math.PI, Math.cos(0.3), Math.E - 2]) {
      const { recognised, numerator, denominator } = exactNumber(value, 0);
      expect(recognised).toBe(false);
      expect(Number(numerator) / Number(denominator)).toBe(value);
    }
  });
});
