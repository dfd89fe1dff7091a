/** Drawn schedules: the transform and the winding count against direct evaluation, and cases whose winding number is known. */
import { describe, expect, it } from 'vitest';
import { randomStream } from '../../../src/core/random.js';
import { buildSchedule } from '../../../src/schedules/registry.js';
import { fourier } from '../../../src/statistics/fourier.js';
import { curveWinding, drawAmplitudes, sampledWinding } from '../../../src/statistics/sampled.js';
import { measureOf, ring, twoLevel } from '../../support/reference-measure.js';

const plane = (values: readonly number[]): Float64Array => Float64Array.from(values);

describe('transform', () => {
  it('equals the sum', () => {
    const stream = randomStream(1, 'transform');
    const re = Float64Array.from({ length: 32 }, () => stream.normal());
    const im = Float64Array.from({ length: 32 }, () => stream.normal());
    const expected = Array.from({ length: 32 }, (_, m) =>
      re.reduce(
        ([a, b], value, n) => {
          const angle = (2 * Math.PI * n * m) / 32;
          return [a + value * Math.cos(angle) - im[n] * Math.sin(angle), b + value * Math.sin(angle) + im[n] * Math.cos(angle)];
        },
        [0, 0],
      ),
    );
    fourier(re, im);
    // The reference sum takes its angles up to 2π·30, with errors of 1e-14 each.
    expected.forEach(([a, b], m) => expect(Math.hypot(re[m] - a, im[m] - b)).toBeLessThan(1e-12));
  });
});

describe('winding of a curve', () => {
  // The number of zeros inside the unit circle, by the argument principle (common practice).
  it.each<[string, number[], number | null]>([
    ['z', [0, 1], 1],
    ['z³', [0, 0, 0, 1], 3],
    ['constant', [2], 0],
    ['z(z − 1/2)', [0, -0.5, 1], 2],
    ['z(z − 2)', [0, -2, 1], 1],
    ['z(z − 1 − 1e-6), a zero just outside', [0, -1 - 1e-6, 1], 1],
    ['z(z − 1 + 1e-6), a zero just inside', [0, -1 + 1e-6, 1], 2],
    ['z(z − 1), a zero on the circle', [0, -1, 1], null],
    ['nothing', [0, 0], 0],
  ])('%s', (_, coefficients, expected) => {
    expect(curveWinding({ re: plane(coefficients), im: new Float64Array(coefficients.length) })).toBe(expected);
  });
});

describe('drawn schedules', () => {
  const sampling = { draws: 3, seed: 5 };
  it('a fixed interval gives the number of phases in every draw (Commun. Math. Phys. 320, 543 (2013), 10.1007/s00220-012-1645-2)', () => {
    for (const [sites, levels] of [
      [3, 2],
      [6, 4],
      [8, 5],
    ] as const) {
      expect(sampledWinding(ring(sites), buildSchedule({ family: 'fixed', interval: 1 }), 600, sampling)).toEqual({
        mean: levels,
        error: 0,
      });
    }
    expect(sampledWinding(ring(6), buildSchedule({ family: 'fixed', interval: Math.PI / 2 }), 600, sampling).mean).toBe(3);
  });
  it('one level winds once whatever the schedule', () => {
    const measure = measureOf([{ energy: 0.3, weight: 1 }]);
    expect(sampledWinding(measure, buildSchedule({ family: 'exponential', mean: 1 }), 50, sampling)).toEqual({ mean: 1, error: 0 });
  });
  it('a draw is named by seed and number', () => {
    const distribution = buildSchedule({ family: 'exponential', mean: 1 });
    const first = sampledWinding(ring(6), distribution, 300, { draws: 12, seed: 5 });
    expect(sampledWinding(ring(6), distribution, 300, { draws: 12, seed: 5 })).toEqual(first);
    expect(first.error).toBeGreaterThan(0);
    expect(sampledWinding(ring(6), distribution, 300, { draws: 1, seed: 5 }).error).toBeNull();
  });
  it('amplitudes of one draw keep the norm: Σ η|f_n|² ≤ 1 and → 1 for the two-level return', () => {
    const distribution = buildSchedule({ family: 'gamma', mean: 1, shape: 2 });
    for (const efficiency of [1, 0.5]) {
      const { re, im } = drawAmplitudes(twoLevel(1), distribution, 400, randomStream(3), efficiency);
      const sum = re.reduce((total, value, n) => total + efficiency * (value * value + im[n] * im[n]), 0);
      expect(Math.abs(sum - 1)).toBeLessThan(1e-12);
    }
  });
});
