import { describe, expect, it } from 'vitest';
import { transferables } from '../../../src/queue/transferables.js';
import type { SpectralMeasure } from '../../../src/spectral/types.js';
import type { PointOutcome } from '../../../src/sweep/types.js';
import { twoLevelSpec } from '../../support/jobs.js';

const outcome = (measure: SpectralMeasure): PointOutcome => ({
  point: { id: 'point', spec: twoLevelSpec(1), measured: { measure, fields: {} as never, overlap: [1, 0] } },
  cells: [],
  failure: null,
  seconds: { kernel: 0, statistics: 0 },
});

describe('transferables', () => {
  it('names each buffer once', () => {
    const weights = new Float64Array(3);
    const measure = { energies: new Float64Array(3), weights, overlapRe: weights, overlapIm: null };
    expect(transferables([outcome(measure), outcome(measure)])).toEqual([measure.energies.buffer, weights.buffer]);
  });

  it('leaves out views into larger memory, empty arrays and failed points', () => {
    const measure = {
      energies: new Float64Array(new ArrayBuffer(1024), 64, 3),
      weights: new Float64Array(8).subarray(2, 5),
      overlapRe: new Float64Array(0),
      overlapIm: new Float64Array(3),
    };
    const failed: PointOutcome = { ...outcome(measure), point: null };
    expect(transferables([failed, outcome(measure)])).toEqual([measure.overlapIm.buffer]);
  });
});
