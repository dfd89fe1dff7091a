import { describe, expect, it } from 'vitest';
import { randomStream } from '../../../src/core/random.js';
import { effectiveDimension, energyMoments, gapRatio, smallestGap } from '../../../src/spectral/summary.js';

const measure = (energies: number[], weights: number[]) => {
  const v = Float64Array.from(weights);
  return { energies: Float64Array.from(energies), weights: v, overlapRe: v, overlapIm: null };
};

describe('summary of a measure', () => {
  // One site of the six-site ring: levels −2, −1, 1, 2 with weights 1/6, 1/3, 1/3, 1/6 (closed form).
  const ring = measure([-2, -1, 1, 2], [1 / 6, 1 / 3, 1 / 3, 1 / 6]);

  it('counts effective levels', () => {
    expect(effectiveDimension(ring)).toBeCloseTo(3.6, 14);
    expect(effectiveDimension(measure([5], [1]))).toBe(1);
  });

  it('gives mean and variance of the energy', () => {
    expect(energyMoments(ring).mean).toBeCloseTo(0, 15);
    expect(energyMoments(ring).variance).toBeCloseTo(2, 14);
  });

  it('gives the smallest gap, and none with one level', () => {
    expect(smallestGap(ring.energies)).toBe(1);
    expect(smallestGap(Float64Array.of(3))).toBeNull();
  });

  it('gives the mean ratio of spacings, and none below three levels', () => {
    expect(gapRatio(ring.energies)).toBeCloseTo(0.5, 15);
    expect(gapRatio(Float64Array.of(0, 1, 2, 3))).toBe(1);
    expect(gapRatio(Float64Array.of(0, 1))).toBeNull();
  });

  it('tends to 2 ln 2 − 1 for independent levels', () => {
    // Localization of interacting fermions at high temperature, Phys. Rev. B 75, 155111 (2007), 10.1103/PhysRevB.75.155111, from memory.
    const stream = randomStream(7, 'levels');
    const levels = Float64Array.from({ length: 40_000 }, () => stream.uniform()).sort();
    // The ratio has a standard deviation of 0.28, so five standard errors are 0.007.
    expect(Math.abs(gapRatio(levels)! - (2 * Math.LN2 - 1))).toBeLessThan(0.007);
  });
});
