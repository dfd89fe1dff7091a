/** A boundary that follows the law b(N) = b∞ + a N^(−ω) gives its parameters back, whatever they are. */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { scalingOf } from '../../src/analysis/scaling.js';

const finite = { noNaN: true, noDefaultInfinity: true } as const;
const law = fc.record({
  limit: fc.double({ ...finite, min: -10, max: 10 }),
  amplitude: fc.tuple(fc.double({ ...finite, min: 0.5, max: 20 }), fc.boolean()).map(([size, negative]) => (negative ? -size : size)),
  exponent: fc.double({ ...finite, min: 0.3, max: 3 }),
  sizes: fc
    .uniqueArray(fc.integer({ min: 1, max: 40 }), { minLength: 5, maxLength: 12 })
    // Four octaves at least, or a weak power cannot be told from another one in double precision.
    .filter((sizes) => Math.max(...sizes) >= 16 * Math.min(...sizes))
    .map((sizes) => sizes.map((size) => 4 * size)),
});

describe('scaling of an exact law', () => {
  it('gives limit, exponent and amplitude to rounding, with residuals of rounding', () => {
    fc.assert(
      fc.property(law, ({ limit, amplitude, exponent, sizes }) => {
        const boundaries = sizes.map((size) => {
          const estimate = limit + amplitude * size ** -exponent;
          return { size, estimate, low: estimate, high: estimate };
        });
        const found = scalingOf(boundaries);
        expect(found.outcome).toBe('fit');
        const fit = found.fit as NonNullable<typeof found.fit>;
        // Rounding of boundaries up to 20 is 4e-15; the condition of the fit over these sizes and exponents adds up to 1e6 where the
        // correction has shrunk to 20·4^(−3)·16^(−3) or is as slow as N^(−0.3).
        expect(Math.abs(fit.limit.value - limit)).toBeLessThan(1e-8);
        expect(Math.abs(fit.exponent.value - exponent)).toBeLessThan(1e-6);
        expect(Math.abs(fit.amplitude / amplitude - 1)).toBeLessThan(1e-5);
        for (const residual of fit.residuals) expect(Math.abs(residual)).toBeLessThan(1e-10);
      }),
      { numRuns: 12 },
    );
  });

  it('does not depend on the unit of the boundary, its origin, or the order of the sizes', () => {
    const shift = fc.double({ ...finite, min: -5, max: 5 });
    fc.assert(
      fc.property(shift, fc.double({ ...finite, min: 0.1, max: 10 }), (origin, unit) => {
        const scatter = [0.011, -0.02, 0.004, 0.015, -0.009, 0.003];
        const boundaries = [4, 8, 16, 24, 40, 64].map((size, index) => ({
          size,
          estimate: 2 + 3 / size + scatter[index],
          low: 0,
          high: 0,
        }));
        const bracketed = boundaries.map((boundary) => ({ ...boundary, low: boundary.estimate - 0.01, high: boundary.estimate + 0.01 }));
        const moved = bracketed.map(({ size, ...values }) => ({
          size,
          estimate: origin + unit * values.estimate,
          low: origin + unit * values.low,
          high: origin + unit * values.high,
        }));
        const [plain, other] = [scalingOf(bracketed).fit, scalingOf(moved.reverse()).fit];
        expect(Math.abs((other?.limit.value ?? NaN) - (origin + unit * (plain?.limit.value ?? NaN)))).toBeLessThan(1e-6);
        expect(Math.abs((other?.exponent.value ?? NaN) - (plain?.exponent.value ?? NaN))).toBeLessThan(1e-6);
      }),
      { numRuns: 5 },
    );
  });
});
