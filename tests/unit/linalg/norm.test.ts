import { describe, expect, it } from 'vitest';
import { normBound, unitScale } from '../../../src/linalg/norm.js';
import { levelsOf } from '../../support/exact-spectrum.js';
import { dimer, randomDense, ring, times, tridiagonal } from '../../support/matrices.js';

describe('normBound', () => {
  it('bounds the spectral norm from above, within √n', () => {
    for (const matrix of [dimer(9, 0.7), ring(8, 1, 0.2), randomDense(20, false, 1), randomDense(20, true, 2)]) {
      const levels = levelsOf(matrix);
      const norm = Math.max(Math.abs(levels[0]), Math.abs(levels.at(-1)!));
      expect(normBound(matrix)).toBeGreaterThanOrEqual(norm * (1 - 1e-14));
      expect(normBound(matrix)).toBeLessThan(norm * Math.sqrt(matrix.dimension) * (1 + 1e-14));
    }
  });

  it('is exact for a ring and a diagonal', () => {
    expect(normBound(ring(6, 1.5))).toBe(3);
    expect(normBound(tridiagonal([1, -7, 2], [0, 0]))).toBe(7);
  });

  it('holds at any scale, and says when a matrix is not finite', () => {
    const matrix = randomDense(9, true, 3);
    for (const exponent of [500, -500]) expect(normBound(times(matrix, 2 ** exponent)) / 2 ** exponent).toBe(normBound(matrix));
    expect(normBound(tridiagonal([0, 0], [0]))).toBe(0);
    expect(normBound(tridiagonal([1, 0], [NaN]))).toBeNaN();
    expect(normBound(tridiagonal([1, Infinity], [0]))).toBe(Infinity);
  });
});

describe('unitScale', () => {
  it('is a power of two that brings the norm into [1/2, 1]', () => {
    for (const norm of [1, 3, 0.3, 1e150, 1e-150, 2 ** 40, Number.MIN_VALUE * 2 ** 60]) {
      const scale = unitScale(norm);
      expect(Number.isInteger(Math.log2(scale))).toBe(true);
      expect(norm * scale).toBeLessThanOrEqual(1);
      if (norm > 1e-300) expect(norm * scale).toBeGreaterThanOrEqual(0.5);
    }
    expect(unitScale(0)).toBe(1);
  });
});
