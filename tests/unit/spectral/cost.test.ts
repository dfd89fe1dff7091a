import { describe, expect, it } from 'vitest';
import type { Extent } from '../../../src/models/types.js';
import { measureCost } from '../../../src/spectral/cost.js';

const extent = (dimension: number, rest: Partial<Extent> = {}): Extent => ({
  hilbertDimension: dimension,
  dimension,
  nonzeros: 10 * dimension,
  storage: 'sparse',
  complex: false,
  ...rest,
});

describe('measureCost', () => {
  it('names the route', () => {
    expect(measureCost(extent(50, { storage: 'tridiagonal' })).route).toBe('tridiagonal-ql');
    expect(measureCost(extent(50)).route).toBe('householder-ql');
    expect(measureCost(extent(500)).route).toBe('lanczos-ql');
    expect(measureCost(extent(500, { storage: 'dense' })).route).toBe('householder-ql');
  });

  it('grows as n² for tridiagonal matrices in time, n in memory; as n³ and n² otherwise', () => {
    const ratio = (rest: Partial<Extent>, key: 'bytes' | 'flops'): number =>
      measureCost(extent(4000, rest))[key] / measureCost(extent(2000, rest))[key];
    expect(ratio({ storage: 'tridiagonal' }, 'flops')).toBeCloseTo(4, 6);
    expect(ratio({ storage: 'tridiagonal' }, 'bytes')).toBeCloseTo(2, 6);
    for (const storage of ['sparse', 'dense'] as const) {
      expect(ratio({ storage }, 'flops')).toBeGreaterThan(7.8);
      expect(ratio({ storage }, 'bytes')).toBeGreaterThan(3.8);
    }
  });

  it('counts twice the memory and four times the arithmetic where numbers are complex', () => {
    const [real, complex] = [measureCost(extent(1000)), measureCost(extent(1000, { complex: true }))];
    expect(complex.bytes / real.bytes).toBeCloseTo(2, 1);
    expect(complex.flops / real.flops).toBeCloseTo(4, 1);
  });
});
