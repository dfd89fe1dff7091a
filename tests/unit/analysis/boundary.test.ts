import { describe, expect, it } from 'vitest';
import { boundaryOf, type BoundaryRule } from '../../../src/analysis/boundary.js';
import { curvesOf } from '../../../src/analysis/curves.js';
import { findQuantity } from '../../../src/analysis/quantities.js';
import { samplesOf } from '../../../src/analysis/samples.js';
import type { CellRow } from '../../../src/store/types.js';
import { cellRow, range, twoLevelRows } from '../../support/two-level-rows.js';

function boundary(rows: readonly CellRow[], field: string, rule: BoundaryRule) {
  const [curve] = curvesOf(samplesOf(rows, findQuantity(field)), 'coupling');
  if (!curve) throw new Error('no curve');
  return boundaryOf(curve, rule);
}

/** Rows whose recurrent weight is any function of the coupling. */
function rowsOf(couplings: readonly number[], f: (x: number) => number): CellRow[] {
  return couplings.map((coupling, ordinal) => cellRow({ coupling, ordinal, cell: { recurrent_weight: f(coupling) } }));
}

describe('a stated level', () => {
  it('brackets the closed-form crossing of the biased two-level system: Σw² = 3/4 at g = b/2', () => {
    const found = boundary(twoLevelRows(range(0.05, 2, 40), 1), 'recurrent_weight', { kind: 'level', level: 0.75 });
    expect(found.outcome).toBe('bracket');
    expect(found.bracket?.low).toBeLessThanOrEqual(0.5);
    expect(found.bracket?.high).toBeGreaterThanOrEqual(0.5);
    // Linear interpolation over h = 0.05 errs by at most h² max|f''| / (8 |f'|) = 0.05² · 1 / (8 · 0.5) < 1e-3 near g = 1/2.
    expect(Math.abs((found.bracket?.estimate ?? 0) - 0.5)).toBeLessThan(1e-3);
    expect(found.words).toBe('crosses 0.75 once, falling');
  });

  it('brackets the coupling where K measurements show three quarters: cos^{2(K−1)}(gτ) = 1/2', () => {
    const exact = Math.acos(2 ** (-1 / 38)) / 0.3;
    const found = boundary(twoLevelRows(range(0.1, 2, 20), 0), 'capped_fraction', { kind: 'level', level: 0.75 });
    expect(found.bracket?.low).toBeLessThanOrEqual(exact);
    expect(found.bracket?.high).toBeGreaterThanOrEqual(exact);
    expect((found.bracket?.high ?? 0) - (found.bracket?.low ?? 0)).toBeCloseTo(0.1, 12);
  });

  it('says that nothing crosses, and on which side the curve stays', () => {
    const found = boundary(twoLevelRows(range(0.1, 2, 20), 0), 'winding_fraction', { kind: 'level', level: 0.5 });
    expect(found).toMatchObject({ outcome: 'no crossing', bracket: null, candidates: 0, words: 'stays at or above 0.5 from 0.1 to 2' });
  });

  it('gives the greatest change of several crossings and their number', () => {
    const values = [0, 0.6, 0.4, 1, 1];
    const found = boundary(
      rowsOf([1, 2, 3, 4, 5], (x) => values[x - 1]),
      'recurrent_weight',
      { kind: 'level', level: 0.5 },
    );
    expect(found.candidates).toBe(3);
    expect(found.bracket).toMatchObject({ low: 1, high: 2 });
    expect(found.words).toContain('3 times');
  });

  it('does not depend on the order of the rows', () => {
    const rows = twoLevelRows(range(0.05, 2, 40), 1);
    const rule = { kind: 'level', level: 0.75 } as const;
    expect(boundary([...rows].reverse(), 'recurrent_weight', rule)).toEqual(boundary(rows, 'recurrent_weight', rule));
  });
});

describe('the steepest change', () => {
  it('finds the inflection of the biased two-level system, g = b/(2√3)', () => {
    const exact = 1 / (2 * Math.sqrt(3));
    const found = boundary(twoLevelRows(range(0.02, 1.5, 75), 1), 'recurrent_weight', { kind: 'steepest' });
    expect(found.bracket?.low).toBeLessThanOrEqual(exact + 0.02);
    expect(found.bracket?.high).toBeGreaterThanOrEqual(exact - 0.02);
    // The parabola through three slopes of spacing h = 0.02 misses the vertex by O(h²).
    expect(Math.abs((found.bracket?.estimate ?? 0) - exact)).toBeLessThan(2e-3);
    expect(found.words).toBe('falls most steeply here');
  });

  it('finds the middle of a tanh step, on a linear and on a logarithmic grid', () => {
    const linear = boundary(
      rowsOf(range(0, 4, 41), (x) => Math.tanh(3 * (x - 2.03))),
      'recurrent_weight',
      { kind: 'steepest' },
    );
    expect(Math.abs((linear.bracket?.estimate ?? 0) - 2.03)).toBeLessThan(5e-3);
    const couplings = range(Math.log(0.01), Math.log(100), 81).map(Math.exp);
    const found = boundary(
      rowsOf(couplings, (x) => Math.tanh(2 * Math.log(x / 0.7))),
      'recurrent_weight',
      { kind: 'steepest' },
    );
    expect(Math.abs(Math.log((found.bracket?.estimate ?? 1) / 0.7))).toBeLessThan(5e-3);
  });

  it('says so when the steepest pair is the outermost', () => {
    const found = boundary(
      rowsOf([1, 2, 3, 4], (x) => Math.exp(-x)),
      'recurrent_weight',
      { kind: 'steepest' },
    );
    expect(found.bracket).toMatchObject({ low: 1, high: 2, estimate: 1.5 });
    expect(found.words).toContain('edge of the grid');
  });

  it('answers a constant and a short curve with words', () => {
    expect(boundary(twoLevelRows(range(0.1, 2, 20), 0), 'winding_fraction', { kind: 'steepest' })).toMatchObject({
      outcome: 'no change',
      words: 'constant at 1',
      bracket: null,
    });
    expect(boundary(twoLevelRows([0.1, 0.2], 1), 'recurrent_weight', { kind: 'steepest' })).toMatchObject({
      outcome: 'too few points',
      used: 2,
    });
  });
});

describe('cells that cannot be trusted', () => {
  it('are left out, counted by reason, and spanned by the bracket', () => {
    const rows = rowsOf([1, 2, 3, 4, 5, 6], (x) => (x < 4 ? 1 : 0)).map((row, index) => {
      if (index === 2) return cellRow({ coupling: 3, ordinal: 2, cell: { recurrent_weight: 0 }, flags: ['doubtful'] });
      if (index === 3) return cellRow({ coupling: 4, ordinal: 3, state: 'failed' });
      if (index === 5) return cellRow({ coupling: 6, ordinal: 5, state: 'missing' });
      return row;
    });
    const found = boundary(rows, 'recurrent_weight', { kind: 'level', level: 0.5 });
    expect(found.bracket).toMatchObject({ low: 2, high: 5 });
    expect(found.left_out).toEqual({ doubtful: 1, failed: 1, missing: 1, undefined: 0 });
    expect(found.used).toBe(3);
  });

  it('do not include resolution-sensitive ones, which are values at their stated resolution', () => {
    const rows = [1, 2, 3].map((coupling) => cellRow({ coupling, ordinal: coupling, flags: ['resolution-sensitive'] }));
    expect(boundary(rows, 'recurrent_weight', { kind: 'level', level: 0.1 }).used).toBe(3);
  });

  it('a value the row does not have is counted as undefined', () => {
    const rows = [1, 2, 3].map((coupling) => cellRow({ coupling, ordinal: coupling, cell: { median_measurements: null } }));
    expect(boundary(rows, 'median_measurements', { kind: 'level', level: 1 }).left_out.undefined).toBe(3);
  });
});
