/** Refinement ends, with the same boundary as a grid that is as dense everywhere. */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { boundaryOf } from '../../src/analysis/boundary.js';
import type { Curve, CurvePoint } from '../../src/analysis/curves.js';
import { nextPoint } from '../../src/analysis/refine.js';
import { TWO_LEVEL_QUESTION } from '../support/two-level-rows.js';

const RULE = { kind: 'level', level: 0 } as const;

function curveOf(xs: readonly number[], point: (x: number) => Pick<CurvePoint, 'value' | 'state'>): Curve {
  const points = [...xs].sort((a, b) => a - b).map((x) => ({ x, error: null, count: 1, sensitive: false, ...point(x) }));
  return { questionOrdinal: 0, question: TWO_LEVEL_QUESTION, resolution: null, at: { size: 2 }, points };
}

/** Adds points until none is wanted. */
function refine(xs: readonly number[], width: number, point: Parameters<typeof curveOf>[1]): number[] {
  const all = [...xs];
  for (;;) {
    const next = nextPoint(curveOf(all, point), RULE, width);
    if (next === null) return all;
    expect(all).not.toContain(next);
    all.push(next);
  }
}

const unit = fc.double({ min: 0, max: 1, noNaN: true });

describe('refining a crossing', () => {
  it('brackets it as narrowly as asked, with one point for each halving', () => {
    fc.assert(
      fc.property(unit, fc.integer({ min: 2, max: 40 }), fc.double({ min: 1e-6, max: 0.4, noNaN: true }), (crossing, count, width) => {
        const grid = Array.from({ length: count }, (_, index) => index / (count - 1));
        const point = (x: number) => ({ value: Math.tanh(5 * (x - crossing)), state: 'value' as const });
        const before = boundaryOf(curveOf(grid, point), RULE).bracket;
        const all = refine(grid, width, point);
        const after = boundaryOf(curveOf(all, point), RULE).bracket;
        if (before === null) {
          expect(all).toEqual(grid);
          return;
        }
        expect(after!.high - after!.low).toBeLessThanOrEqual(width * (1 + 1e-8));
        expect(after!.low).toBeLessThanOrEqual(crossing);
        expect(after!.high).toBeGreaterThanOrEqual(crossing);
        const halvings = Math.max(0, Math.ceil(Math.log2((before.high - before.low) / width) - 1e-6));
        expect(all.length - grid.length).toBeLessThanOrEqual(halvings);
      }),
    );
  });

  it('ends where points in the bracket cannot be used, and never asks for one twice', () => {
    fc.assert(
      fc.property(unit, unit, fc.double({ min: 0.01, max: 0.2, noNaN: true }), (crossing, centre, radius) => {
        const width = 1 / 256;
        const grid = Array.from({ length: 9 }, (_, index) => index / 8);
        const point = (x: number) => ({
          value: x - crossing,
          state: Math.abs(x - centre) < radius ? ('doubtful' as const) : ('value' as const),
        });
        const all = refine(grid, width, point);
        // From 1/8 to 1/256 are five halvings, at two ends of a bracket.
        expect(all.length - grid.length).toBeLessThanOrEqual(10);
        const { bracket } = boundaryOf(curveOf(all, point), RULE);
        if (bracket === null || bracket.high - bracket.low <= width) return;
        // What is left wide has doubtful points close to both ends, and none else.
        const inside = all.filter((x) => x > bracket.low && x < bracket.high);
        expect(Math.min(...inside) - bracket.low).toBeLessThanOrEqual(width);
        expect(bracket.high - Math.max(...inside)).toBeLessThanOrEqual(width);
        for (const x of inside) expect(point(x).state).toBe('doubtful');
      }),
    );
  });
});
