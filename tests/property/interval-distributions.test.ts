/**
 * What holds for every interval distribution: |χ| ≤ 1, χ(−x) = χ(x)*, the first two moments from χ near 0, samples ≥ 0 whose mean,
 * variance and mean of exp(−i x τ) are those declared, |χ| = 1 at the lattice frequency.
 */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { randomStream } from '../../src/core/random.js';
import { buildSchedule } from '../../src/schedules/registry.js';
import type { ScheduleSpec } from '../../src/schedules/types.js';

const time = fc.double({ min: 0.05, max: 3, noNaN: true });
const delay = fc.constantFrom(0, 0, 0.4);
const anySchedule: fc.Arbitrary<ScheduleSpec> = fc
  .tuple(
    fc.oneof(
      time.map((interval) => ({ family: 'fixed', interval })),
      time.map((mean) => ({ family: 'exponential', mean })),
      fc.tuple(time, fc.double({ min: 0.3, max: 300, noNaN: true })).map(([mean, shape]) => ({ family: 'gamma', mean, shape })),
      fc.tuple(time, time).map(([low, width]) => ({ family: 'uniform', low, high: low + width })),
      fc
        .tuple(time, time, fc.double({ min: 0.1, max: 0.9, noNaN: true }))
        .map(([first, second, weight]) => ({ family: 'two-point', first, second, weight })),
      fc
        .tuple(fc.double({ min: -6, max: 6, noNaN: true }), time)
        .map(([location, scale]) => ({ family: 'truncated-normal', location, scale })),
      fc.tuple(time, time).map(([mean, shape]) => ({ family: 'inverse-gaussian', mean, shape })),
      fc.array(time, { minLength: 1, maxLength: 6 }).map((intervals) => ({ family: 'empirical', intervals })),
    ),
    delay,
  )
  .map(([spec, d]) => ({ ...spec, 'dead-time': d }));

describe('interval distributions', () => {
  it('χ is a characteristic function', () => {
    fc.assert(
      fc.property(anySchedule, fc.double({ min: -80, max: 80, noNaN: true }), (spec, x) => {
        const distribution = buildSchedule(spec);
        const plus = new Float64Array(2);
        const minus = new Float64Array(2);
        distribution.complement(x, plus);
        distribution.complement(-x, minus);
        expect(Math.hypot(1 - plus[0], plus[1])).toBeLessThan(1 + 1e-14);
        // Conjugation flips signs only, so every rounding is the same.
        expect([minus[0], minus[1] + plus[1]]).toEqual([plus[0], 0]);
        distribution.complement(0, plus);
        expect([Math.abs(plus[0]), Math.abs(plus[1])]).toEqual([0, 0]);
      }),
      { numRuns: 400, seed: 20 },
    );
  });

  it('keeps its digits as x → 0: mean and second moment', () => {
    fc.assert(
      fc.property(anySchedule, fc.constantFrom(1e-7, 1e-5), (spec, x) => {
        const distribution = buildSchedule(spec);
        const { mean, variance } = distribution;
        const out = new Float64Array(2);
        distribution.complement(x, out);
        // Next terms of the series: x²<τ³>/6 and x²<τ⁴>/12 of the leading ones; the latter below 1e-10 of it for all these laws.
        expect(Math.abs(out[1] / x / mean - 1)).toBeLessThan(1e-6);
        expect(Math.abs((2 * out[0]) / (x * x) / (variance + mean * mean) - 1)).toBeLessThan(1e-6);
      }),
      { numRuns: 200, seed: 20 },
    );
  });

  it('samples follow the declared mean, variance and χ', () => {
    fc.assert(
      fc.property(anySchedule, fc.integer({ min: 1, max: 1e9 }), (spec, seed) => {
        const distribution = buildSchedule(spec);
        const stream = randomStream(seed, 'samples');
        const size = 4000;
        const samples = Array.from({ length: size }, () => distribution.sample(stream));
        expect(Math.min(...samples)).toBeGreaterThanOrEqual(0);
        const average = (f: (tau: number) => number): readonly [number, number] => {
          const values = samples.map(f);
          const mean = values.reduce((sum, value) => sum + value, 0) / size;
          const square = values.reduce((sum, value) => sum + (value - mean) ** 2, 0) / size;
          return [mean, Math.sqrt(square / size)];
        };
        const out = new Float64Array(2);
        // Six standard errors, and rounding where there is no spread.
        const [mean, error] = average((tau) => tau);
        expect(Math.abs(mean - distribution.mean)).toBeLessThan(6 * error + 1e-12);
        const [second, secondError] = average((tau) => (tau - distribution.mean) ** 2);
        expect(Math.abs(second - distribution.variance)).toBeLessThan(7 * secondError + 1e-12);
        for (const x of [0.7, 3]) {
          distribution.complement(x, out);
          const [re, reError] = average((tau) => Math.cos(x * tau));
          const [im, imError] = average((tau) => Math.sin(x * tau));
          expect(Math.abs(1 - re - out[0])).toBeLessThan(6 * reError + 1e-12);
          expect(Math.abs(im - out[1])).toBeLessThan(6 * imError + 1e-12);
        }
      }),
      { numRuns: 60, seed: 21 },
    );
  });

  it('|χ| = 1 at the lattice frequency', () => {
    fc.assert(
      fc.property(anySchedule, (spec) => {
        const distribution = buildSchedule(spec);
        const { lattice, mean } = distribution;
        // At a spacing that is itself rounding the frequency has no digits.
        if (lattice === null || lattice < 1e-3 * mean) return;
        const out = new Float64Array(2);
        distribution.complement((2 * Math.PI) / lattice, out);
        // Readings share a spacing to 1e-9 of their range.
        expect(Math.abs(Math.hypot(1 - out[0], out[1]) - 1)).toBeLessThan(1e-6);
      }),
      { numRuns: 200, seed: 20 },
    );
  });
});
