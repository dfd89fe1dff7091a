/** Averages over disorder realisations, against closed forms of the log-normal distribution and hand-made values. */
import { describe, expect, it } from 'vitest';
import { curvesOf } from '../../../src/analysis/curves.js';
import { findQuantity } from '../../../src/analysis/quantities.js';
import { type Average, samplesOf } from '../../../src/analysis/samples.js';
import { randomStream } from '../../../src/core/random.js';
import { cellRow } from '../../support/two-level-rows.js';

function point(values: readonly number[], average?: Average) {
  const rows = values.map((value, realisation) =>
    cellRow({ coupling: 1, ordinal: realisation, coordinates: { realisation }, cell: { capped_mean: value } }),
  );
  const samples = samplesOf(rows, findQuantity('capped_mean')).map((sample) => (average === undefined ? sample : { ...sample, average }));
  const [curve] = curvesOf(samples, 'coupling');
  expect(curve.points).toHaveLength(1);
  return curve.points[0];
}

describe('realisations', () => {
  it('become their mean with its standard error s/√n', () => {
    // 1, 2, 3, 6: mean 3, s² = (4 + 1 + 0 + 9)/3.
    expect(point([1, 2, 3, 6])).toMatchObject({ value: 3, count: 4 });
    expect(point([1, 2, 3, 6]).error).toBeCloseTo(Math.sqrt(14 / 3 / 4), 15);
    expect(point([5])).toMatchObject({ value: 5, error: null });
  });

  it('become their typical value exp<ln x>, the geometric mean, with the error of <ln x> times the value', () => {
    expect(point([1, 100], 'typical').value).toBeCloseTo(10, 13);
    // ln 1 and ln 100: s² = (ln 10)²·2, standard error ln 10.
    expect(point([1, 100], 'typical').error).toBeCloseTo(10 * Math.log(10), 12);
    expect(point([4, 4, 4], 'typical').value).toBeCloseTo(4, 14);
    expect(point([0, 4], 'typical')).toMatchObject({ value: 0, error: null });
    expect(point([-1, 4], 'typical')).toMatchObject({ value: null, state: 'undefined-value' });
  });

  it('of a log-normal quantity: the typical value is exp(μ), the mean exp(μ + σ²/2) (common practice)', () => {
    const stream = randomStream(5, 'log-normal');
    const values = Array.from({ length: 4000 }, () => Math.exp(0.3 + 0.8 * stream.normal()));
    for (const [average, expected] of [
      ['typical', Math.exp(0.3)],
      ['mean', Math.exp(0.3 + 0.32)],
    ] as const) {
      const { value, error } = point(values, average);
      // Four standard errors of a fixed seed.
      expect(Math.abs(value! - expected)).toBeLessThan(4 * error!);
      expect(error! / expected).toBeLessThan(0.03);
    }
  });
});
