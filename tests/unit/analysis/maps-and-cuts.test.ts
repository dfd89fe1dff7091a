import { describe, expect, it } from 'vitest';
import { boundaryOf } from '../../../src/analysis/boundary.js';
import { cutsOf } from '../../../src/analysis/cut.js';
import { curvesOf } from '../../../src/analysis/curves.js';
import { mapAxes } from '../../../src/analysis/map-axes.js';
import { boundariesOn, phaseMapsOf, valueRange } from '../../../src/analysis/phase-map.js';
import { findQuantity, ORDER_PARAMETERS } from '../../../src/analysis/quantities.js';
import { collectSamples, samplesOf } from '../../../src/analysis/samples.js';
import { spacingOf } from '../../../src/analysis/spacing.js';
import { WindrowError } from '../../../src/core/errors.js';
import type { CellRow } from '../../../src/store/types.js';
import { cellRow, TWO_LEVEL_QUESTION } from '../../support/two-level-rows.js';

const other = { ...TWO_LEVEL_QUESTION, budget: 50 };
const sizes = [4, 2, 3];
const couplings = [0.2, 0.1, 0.3];

/** winding number = 10·size + 100·coupling + 1000·question, on a grid given in no order. */
const grid: CellRow[] = sizes.flatMap((size) =>
  couplings.flatMap((coupling) =>
    [0, 1].map((questionOrdinal) =>
      cellRow({
        size,
        coupling,
        questionOrdinal,
        question: questionOrdinal === 0 ? TWO_LEVEL_QUESTION : other,
        cell: { winding_number: 10 * size + Math.round(100 * coupling) + 1000 * questionOrdinal },
      }),
    ),
  ),
);
const winding = findQuantity('winding_number');

describe('phase maps', () => {
  it('make one map a question, rows and columns ascending', () => {
    const maps = phaseMapsOf(samplesOf(grid, winding), { x: 'coupling', y: 'size' });
    expect(maps.map(({ questionOrdinal }) => questionOrdinal)).toEqual([0, 1]);
    expect(maps[0]?.x.values).toEqual([0.1, 0.2, 0.3]);
    expect(maps[0]?.y.values).toEqual([2, 3, 4]);
    expect(maps[0]?.cells.map((row) => row.map(({ value }) => value))).toEqual([
      [30, 40, 50],
      [40, 50, 60],
      [50, 60, 70],
    ]);
    expect(maps[1]?.cells[0]?.[0]?.value).toBe(1030);
    expect(valueRange(maps)).toEqual([30, 1070]);
    expect(maps[1]?.question.budget).toBe(50);
  });

  it('transpose when the axes are exchanged', () => {
    const samples = samplesOf(grid, winding);
    const [a] = phaseMapsOf(samples, { x: 'coupling', y: 'size' });
    const [b] = phaseMapsOf(samples, { x: 'size', y: 'coupling' });
    expect(b?.cells.map((row) => row.map(({ value }) => value))).toEqual(
      a?.x.values.map((_, column) => a.cells.map((row) => row[column]?.value)),
    );
  });

  it('tell missing, failed, doubtful and undefined cells apart', () => {
    const rows = [
      cellRow({ coupling: 0.1, size: 2, flags: ['doubtful'] }),
      cellRow({ coupling: 0.2, size: 2, state: 'failed' }),
      cellRow({ coupling: 0.3, size: 2, state: 'missing' }),
      cellRow({ coupling: 0.4, size: 2, cell: { median_measurements: null } }),
      cellRow({ coupling: 0.5, size: 3 }),
    ];
    const [map] = phaseMapsOf(samplesOf(rows, findQuantity('median_measurements')), { x: 'coupling', y: 'size' });
    expect(map?.cells.map((row) => row.map(({ state }) => state))).toEqual([
      ['doubtful', 'failed', 'missing', 'undefined-value', 'missing'],
      ['missing', 'missing', 'missing', 'missing', 'value'],
    ]);
    expect(map?.cells[0]?.[0]?.value).toBe(1);
  });

  it('average disorder realisations and give the standard error of the mean', () => {
    const rows = [1, 2, 6].map((value, realisation) =>
      cellRow({ coupling: 1, coordinates: { realisation }, cell: { recurrent_weight: value } }),
    );
    const [map] = phaseMapsOf(samplesOf(rows, findQuantity('recurrent_weight')), { x: 'coupling', y: 'size' });
    // Sample variance of 1, 2, 6 is 7; standard error √(7/3).
    expect(map?.cells[0]?.[0]).toMatchObject({ value: 3, count: 3 });
    expect(map?.cells[0]?.[0]?.error).toBeCloseTo(Math.sqrt(7 / 3), 14);
    expect(curvesOf(samplesOf(rows, winding), 'coupling', [])).toHaveLength(3);
  });

  it('make one map for each value of a further axis and find the boundaries that belong to it', () => {
    const rows = [0, 1].flatMap((tilt) =>
      [1, 2, 3].map((coupling) => cellRow({ coupling, coordinates: { tilt }, cell: { recurrent_weight: coupling > 1 + tilt ? 1 : 0 } })),
    );
    const samples = samplesOf(rows, findQuantity('recurrent_weight'));
    const maps = phaseMapsOf(samples, { x: 'coupling', y: 'size' });
    expect(maps.map(({ at }) => at)).toEqual([{ tilt: 0 }, { tilt: 1 }]);
    const boundaries = curvesOf(samples, 'coupling').map((curve) => boundaryOf(curve, { kind: 'level', level: 0.5 }));
    expect(maps.map((map) => boundariesOn(map, boundaries).get(2)?.bracket?.low)).toEqual([1, 2]);
  });
});

describe('cuts', () => {
  it('run along the coupling at one size, and along the size at one coupling', () => {
    const samples = samplesOf(grid, winding);
    const [a] = cutsOf(samples, 'coupling', { size: 3 });
    expect(a?.points.map(({ x, value }) => [x, value])).toEqual([
      [0.1, 40],
      [0.2, 50],
      [0.3, 60],
    ]);
    const [b] = cutsOf(samples, 'size', { coupling: 0.1 + 0.2 });
    expect(b?.points.map(({ x, value }) => [x, value])).toEqual([
      [2, 50],
      [3, 60],
      [4, 70],
    ]);
    expect(cutsOf(samples, 'coupling')).toHaveLength(6);
  });

  it('refuse an axis or a value that the grid does not have, and name those it has', () => {
    const samples = samplesOf(grid, winding);
    for (const [action, found] of [
      [() => cutsOf(samples, 'tilt'), 'tilt'],
      [() => cutsOf(samples, 'coupling', { size: 7 }), '7'],
      [() => cutsOf(samples, 'coupling', { bias: 1 }), 'bias'],
    ] as const) {
      expect(action).toThrow(WindrowError);
      try {
        action();
      } catch (error) {
        expect((error as WindrowError).code).toBe('analysis.axis');
        expect((error as WindrowError).details.found).toBe(found);
        expect((error as WindrowError).details.allowed).toMatch(/size|2, 3, 4|4, 2, 3/);
      }
    }
  });
});

describe('quantities', () => {
  it('share the winding number by the accessible dimension and the capped mean by what the budget can show', () => {
    const row = cellRow({ coupling: 1, point: { accessible_dimension: 40 }, cell: { winding_number: 10, capped_mean: 15 } });
    expect(findQuantity('winding_fraction').value(row)).toBe(0.25);
    // budget 20 < 40 accessible levels
    expect(findQuantity('capped_fraction').value(row)).toBe(0.75);
    expect(findQuantity('capped_fraction').value({ ...row, spec: { ...row.spec, detected: 'down' } })).toBe(0.75);
    expect(findQuantity('sector_fraction').value(row)).toBe(1);
  });

  it('have no value where the row lacks the field', () => {
    const row = cellRow({ coupling: 1, state: 'missing' });
    for (const quantity of ORDER_PARAMETERS) expect(quantity.value(row)).toBeNull();
    expect(findQuantity('largest_sector_fraction').value(cellRow({ coupling: 1 }))).toBeNull();
  });

  it('are refused by name with the names that exist', () => {
    expect(() => findQuantity('winding')).toThrow(expect.objectContaining({ code: 'analysis.field' }) as Error);
  });

  it('stream from rows as well as from a list', async () => {
    async function* stream() {
      await Promise.resolve();
      yield* grid;
    }
    expect(await collectSamples(stream(), winding)).toEqual(samplesOf(grid, winding));
  });
});

describe('spacing', () => {
  it('recognises linear and logarithmic grids', () => {
    expect(spacingOf([1, 2, 3, 4])).toBe('linear');
    expect(spacingOf([1, 2, 4, 8])).toBe('log');
    expect(spacingOf([0.1, 0.215, 0.464, 1])).toBe('log');
    expect(spacingOf([0, 1, 10])).toBe('linear');
    expect(spacingOf([1, 10])).toBe('linear');
  });
});

describe('the axes of a map', () => {
  const axis = (name: string, ...values: (number | string)[]) => ({ name, values, unit: '' });
  it.each([
    ['coupling and size', [axis('size', 2, 4), axis('coupling', 1, 2)], [], 'coupling', 'size'],
    ['another axis for a single coupling', [axis('size', 2, 4), axis('coupling', 1), axis('tilt', 0, 1)], [], 'tilt', 'size'],
    [
      'numbers before words',
      [axis('size', 2), axis('coupling', 1, 2), axis('detect', 'a', 'b'), axis('tilt', 0, 1)],
      [],
      'coupling',
      'tilt',
    ],
    ['the size alone', [axis('size', 2, 4), axis('coupling', 1)], [], 'size', 'coupling'],
    ['the size where the coupling is held', [axis('size', 2, 4), axis('coupling', 1, 2)], ['coupling'], 'size', 'coupling'],
    ['never an averaged axis', [axis('size', 2), axis('coupling', 1), axis('realisation', 0, 1)], [], 'coupling', 'size'],
  ])('%s', (_name, axes, fixed, x, y) => expect(mapAxes(axes, fixed)).toEqual({ x, y }));
});
