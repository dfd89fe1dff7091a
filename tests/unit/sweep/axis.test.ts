/** Axes: what each way of writing one stands for. */
import { describe, expect, it } from 'vitest';
import { expandAxis } from '../../../src/sweep/axis.js';
import type { Json } from '../../../src/core/json.js';

const expand = (raw: Json): readonly Json[] => expandAxis<Json>(raw, ['x'], false);

describe('axes', () => {
  it('takes a value, a list and an explicit list', () => {
    expect(expand(3)).toEqual([3]);
    expect(expand([3, 1, 2])).toEqual([3, 1, 2]);
    expect(expand({ values: ['ring', 'line'] })).toEqual(['ring', 'line']);
  });

  it('keeps a plain list together where lists are values', () => {
    expect(expandAxis<Json>([0.1, 0.2], ['x'], true)).toEqual([[0.1, 0.2]]);
    expect(expandAxis<Json>({ values: [[1], [2, 3]] }, ['x'], true)).toEqual([[1], [2, 3]]);
  });

  it('hits the decimal fractions that are meant', () => {
    expect(expand({ from: 0.1, to: 0.5, step: 0.1 })).toEqual([0.1, 0.2, 0.3, 0.4, 0.5]);
    expect(expand({ from: -1, to: 1, count: 21 })).toEqual(Array.from({ length: 21 }, (_, i) => (i - 10) / 10));
    expect(expand({ from: 0.05, to: 0.35, count: 4 })).toEqual([0.05, 0.15, 0.25, 0.35]);
    expect(expand({ from: 1e-7, to: 3e-7, step: 1e-7 })).toEqual([1e-7, 2e-7, 3e-7]);
    expect(expand({ from: 4, to: 60, step: 4 })).toEqual(Array.from({ length: 15 }, (_, i) => 4 * (i + 1)));
  });

  it('spaces logarithmically', () => {
    expect(expand({ from: 0.01, to: 100, count: 5, spacing: 'log' })).toEqual([0.01, 0.1, 1, 10, 100]);
    expect(expand({ from: 0.5, to: 32, count: 7, spacing: 'log' })).toEqual([0.5, 1, 2, 4, 8, 16, 32]);
  });

  it('takes a range of one value', () => {
    expect(expand({ from: 2, to: 2, count: 1 })).toEqual([2]);
    expect(expand({ from: 2, to: 2, step: 1 })).toEqual([2]);
  });
});
