/** The bracket of a boundary contains the crossing, for any monotone curve on any grid. */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { boundaryOf } from '../../src/analysis/boundary.js';
import type { Curve, CurvePoint } from '../../src/analysis/curves.js';
import { spacingOf } from '../../src/analysis/spacing.js';
import { TWO_LEVEL_QUESTION } from '../support/two-level-rows.js';

function curve(points: readonly { x: number; value: number; doubtful?: boolean }[]): Curve {
  return {
    questionOrdinal: 0,
    question: TWO_LEVEL_QUESTION,
    resolution: null,
    at: { size: 2 },
    points: points.map(({ x, value, doubtful }): CurvePoint => ({
      x,
      value,
      state: doubtful ? 'doubtful' : 'value',
      error: null,
      count: 1,
      sensitive: false,
    })),
  };
}

const finite = { noNaN: true, noDefaultInfinity: true } as const;
const grid = fc
  .uniqueArray(fc.double({ ...finite, min: -50, max: 50 }), { minLength: 2, maxLength: 40 })
  .map((xs) => xs.sort((a, b) => a - b));

describe('the level rule', () => {
  it('brackets the crossing of a monotone function, wherever the grid and whichever cells are doubtful', () => {
    const input = fc.record({
      xs: grid,
      position: fc.double({ ...finite, min: 0, max: 1 }),
      width: fc.double({ ...finite, min: 1e-3, max: 20 }),
      falling: fc.boolean(),
      doubtful: fc.array(fc.boolean(), { minLength: 40, maxLength: 40 }),
    });
    fc.assert(
      fc.property(input, ({ xs, position, width, falling, doubtful }) => {
        const [low, high] = [xs[0], xs.at(-1) as number];
        const crossing = low + position * (high - low);
        const sign = falling ? -1 : 1;
        // atan crosses 0 at `crossing` only, and is strictly monotone in floating point wherever arguments differ enough.
        const points = xs.map((x, index) => ({
          x,
          value: sign * Math.atan((x - crossing) / width),
          doubtful: doubtful[index] && index > 0 && index < xs.length - 1,
        }));
        const found = boundaryOf(curve(points), { kind: 'level', level: 0 });
        const [first, last] = [points[0]?.value ?? 0, points.at(-1)?.value ?? 0];
        if (first >= 0 === last >= 0) {
          expect(found.outcome).toBe('no crossing');
          return;
        }
        expect(found.outcome).toBe('bracket');
        expect(found.candidates).toBe(1);
        const bracket = found.bracket as NonNullable<typeof found.bracket>;
        expect(bracket.low).toBeLessThanOrEqual(crossing);
        expect(bracket.high).toBeGreaterThanOrEqual(crossing);
        expect(bracket.estimate).toBeGreaterThanOrEqual(bracket.low);
        expect(bracket.estimate).toBeLessThanOrEqual(bracket.high);
        const kept = points.filter((point) => !point.doubtful).map(({ x }) => x);
        expect(kept.indexOf(bracket.high)).toBe(kept.indexOf(bracket.low) + 1);
        expect(found.left_out.doubtful).toBe(points.length - kept.length);
      }),
      { numRuns: 500 },
    );
  });

  it('finds the crossing of a straight line to rounding', () => {
    fc.assert(
      fc.property(grid, fc.double({ ...finite, min: 0.01, max: 0.99 }), (xs, position) => {
        const [low, high] = [xs[0], xs.at(-1) as number];
        fc.pre(high - low > 1e-6);
        const crossing = low + position * (high - low);
        const found = boundaryOf(curve(xs.map((x) => ({ x, value: 3 * (x - crossing) }))), { kind: 'level', level: 0 });
        // Each product rounds to half an ulp of values up to 300, divided by the slope 3.
        expect(Math.abs((found.bracket?.estimate ?? NaN) - crossing)).toBeLessThan(1e-12);
      }),
    );
  });
});

describe('the steepest rule', () => {
  it('gives a bracket of neighbours that no other pair exceeds in slope, the estimate inside', () => {
    const unit = fc.double({ ...finite, min: 0, max: 1 });
    const steps = fc.array(fc.record({ step: fc.integer({ min: 1, max: 900 }), value: unit }), { minLength: 3, maxLength: 40 });
    fc.assert(
      fc.property(steps, (list) => {
        let x = 0;
        const points = list.map(({ step, value }) => ({ x: (x += step) / 100, value }));
        const slopes = points.slice(1).map((point, index) => {
          const before = points[index];
          return Math.abs((point.value - before.value) / (point.x - before.x));
        });
        // A grid of constant ratios is searched on the logarithmic scale, where other pairs may be steeper.
        fc.pre(spacingOf(points.map((point) => point.x)) === 'linear');
        const found = boundaryOf(curve(points), { kind: 'steepest' });
        if (found.outcome === 'no change') return;
        const bracket = found.bracket as NonNullable<typeof found.bracket>;
        const at = points.findIndex((point) => point.x === bracket.low);
        expect(points[at + 1]?.x).toBe(bracket.high);
        expect(slopes[at]).toBe(Math.max(...slopes));
        expect(bracket.estimate).toBeGreaterThanOrEqual(bracket.low);
        expect(bracket.estimate).toBeLessThanOrEqual(bracket.high);
      }),
      { numRuns: 300 },
    );
  });
});
