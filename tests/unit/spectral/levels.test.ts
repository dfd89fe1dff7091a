import { describe, expect, it } from 'vitest';
import { brightThreshold, mergingDistance } from '../../../src/linalg/precision.js';
import { brightLevels } from '../../../src/spectral/levels.js';

const raw = (energies: number[], weights: number[]) => ({
  energies: Float64Array.from(energies),
  weights: Float64Array.from(weights),
  overlap: null,
});

describe('brightLevels', () => {
  const distance = mergingDistance(10, 4);

  it('merges neighbours within max(64, 4n)·ε‖H‖ and keeps them beyond', () => {
    expect(mergingDistance(10, 1)).toBe(64 * Number.EPSILON);
    expect(mergingDistance(100, 2)).toBe(800 * Number.EPSILON);
    const merged = brightLevels(raw([1, 1 + distance, 3], [0.25, 0.25, 0.5]), 10, 4);
    expect(merged.energies.length).toBe(2);
    expect(merged.weights).toEqual(Float64Array.of(0.5, 0.5));
    expect(merged.energies[0]).toBeCloseTo(1 + distance / 2, 15);
    expect(brightLevels(raw([1, 1 + 1.01 * distance, 3], [0.25, 0.25, 0.5]), 10, 4).energies.length).toBe(3);
  });

  it('puts a merged level at the mean by weight', () => {
    const merged = brightLevels(raw([-2, -2 + distance], [0.25, 0.75]), 10, 4);
    expect((merged.energies[0] + 2) / distance).toBeCloseTo(0.75, 1);
  });

  it('drops what is not above (16·n·ε)², after adding up', () => {
    const threshold = brightThreshold(10);
    expect(threshold).toBe((160 * Number.EPSILON) ** 2);
    const levels = raw([0, 1, 2, 2], [1, threshold, 0.6 * threshold, 0.6 * threshold]);
    expect([...brightLevels(levels, 10, 4).energies]).toEqual([0, 2]);
  });

  it('adds overlaps with the weights, and uses the weights themselves for the return problem', () => {
    const overlap = { re: Float64Array.of(0.1, 0.2, -0.3), im: Float64Array.of(1, 2, 3) };
    const merged = brightLevels({ ...raw([0, 0, 1], [0.25, 0.25, 0.5]), overlap }, 3, 1);
    expect(merged.overlapRe[0]).toBeCloseTo(0.3, 15);
    expect([merged.overlapRe[1], ...merged.overlapIm!]).toEqual([-0.3, 3, 3]);
    const home = brightLevels(raw([0, 1], [0.5, 0.5]), 2, 1);
    expect(home.overlapRe).toBe(home.weights);
    expect(home.overlapIm).toBeNull();
  });
});
