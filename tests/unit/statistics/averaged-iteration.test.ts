import { describe, expect, it } from 'vitest';
import { randomStream } from '../../../src/core/random.js';
import { buildSchedule } from '../../../src/schedules/registry.js';
import type { SpectralMeasure } from '../../../src/spectral/types.js';
import { scalarIteration } from '../../../src/statistics/averaged-scalar.js';
import { vectorIteration } from '../../../src/statistics/averaged-vector.js';

function measureOf(n: number, kind: 'return' | 'real' | 'complex'): SpectralMeasure {
  const stream = randomStream(n, kind);
  const raw = Float64Array.from({ length: n }, () => 0.01 + stream.uniform());
  const total = raw.reduce((sum, x) => sum + x, 0);
  const weights = raw.map((x) => x / total);
  const energies = Float64Array.from({ length: n }, () => 4 * stream.normal()).sort();
  if (kind === 'return') return { energies, weights, overlapRe: weights, overlapIm: null };
  const overlap = (): Float64Array => weights.map((v) => (stream.normal() * Math.sqrt(v)) / n);
  return { energies, weights, overlapRe: overlap(), overlapIm: kind === 'complex' ? overlap() : null };
}

describe('averaged iteration', () => {
  // Every residue of the blocks of four, and more than one block of rows.
  for (const n of [1, 2, 3, 4, 5, 6, 7, 8, 9, 13, 30]) {
    for (const kind of ['return', 'real', 'complex'] as const) {
      it(`is the same on vectors and in TypeScript: ${n} levels, ${kind}`, () => {
        const measure = measureOf(n, kind);
        const distribution = buildSchedule({ family: 'gamma', mean: 0.7, shape: 2.5 });
        const scalar = scalarIteration(measure, distribution, 0.8);
        const vector = vectorIteration(measure, distribution, 0.8);
        expect(vector.remaining()).toBeCloseTo(scalar.remaining(), 14);
        for (let k = 0; k < 50; k++) {
          // Both sum the same n² terms in another order; a contraction does not let rounding build up.
          expect(Math.abs(vector.step() - scalar.step())).toBeLessThan(1e-14 * n);
          expect(Math.abs(vector.remaining() - scalar.remaining())).toBeLessThan(1e-14 * n);
        }
        vector.close();
      });
    }
  }

  it('keeps two iterations apart, and reuses memory without a trace of what was there', () => {
    const [first, second] = [measureOf(9, 'complex'), measureOf(6, 'real')];
    const distribution = buildSchedule({ family: 'exponential', mean: 1 });
    const run = (measure: SpectralMeasure): number[] => {
      const iteration = vectorIteration(measure, distribution, 1);
      const values = Array.from({ length: 5 }, () => iteration.step());
      iteration.close();
      return values;
    };
    const alone = [run(first), run(second)];
    const [a, b] = [vectorIteration(first, distribution, 1), vectorIteration(second, distribution, 1)];
    const together = Array.from({ length: 5 }, () => [a.step(), b.step()]);
    expect(together.map(([x]) => x)).toEqual(alone[0]);
    expect(together.map(([, y]) => y)).toEqual(alone[1]);
    a.close();
    b.close();
    expect(run(second)).toEqual(alone[1]);
  });
});
