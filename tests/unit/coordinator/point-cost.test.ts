import { describe, expect, it } from 'vitest';
import { pointCost } from '../../../src/coordinator/point-cost.js';
import { doubleWell } from '../../support/sweeps.js';

const { grid } = doubleWell('cost');
const spec = grid.pointAt(grid.points - 1).spec;

describe('pointCost', () => {
  it('adds the measure, unless it is stored, and the open questions', () => {
    const [one, two] = grid.questions;
    const cost = (measured: boolean, ...open: (typeof one)[]): number => pointCost(spec, measured, open).operations;
    expect(cost(true)).toBe(0);
    expect(cost(false)).toBeGreaterThan(0);
    expect(cost(false, one, two)).toBeCloseTo(cost(false) + cost(true, one) + cost(true, two), 6);
  });

  it('grows with the system', () => {
    const costs = [0, 20, 40, 60].map((ordinal) => pointCost(grid.pointAt(ordinal).spec, false, grid.questions));
    for (let size = 1; size < costs.length; size++) {
      expect(costs[size].operations).toBeGreaterThan(costs[size - 1].operations);
      expect(costs[size].memory).toBeGreaterThanOrEqual(costs[size - 1].memory);
    }
  });

  it('costs nothing where nothing can be estimated: the evaluation will say why', () => {
    expect(pointCost({ ...spec, model: 'unknown' }, false, grid.questions)).toEqual({ memory: 0, operations: 0 });
  });
});
