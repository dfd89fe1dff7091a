/** The views of the store: the same rows as `export`, and the same order parameters as the analysis, whatever became of a cell. */
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { ORDER_PARAMETERS } from '../../src/analysis/quantities.js';
import { flatRecord, RECORD_KEYS } from '../../src/report/flat-record.js';
import type { CellRow } from '../../src/store/types.js';
import { createDatabase, type TestDatabase } from '../support/database.js';
import { cellResult, failureOf, gridPoint, measured, pointResult, questionRecord, sweepOf } from '../support/results.js';

type ViewRow = { readonly [column: string]: unknown };

let database: TestDatabase;
let cells: CellRow[];

beforeAll(async () => {
  database = await createDatabase();
  const store = await database.open();
  const questions = [questionRecord(0), questionRecord(1)];
  const grid = [0, 1, 2, 3].map((ordinal) => gridPoint(ordinal));
  const transition = { ...grid[3], spec: { ...grid[3].spec, detected: 'right', disorder: { strength: 0.5, seed: 3, realisation: 2 } } };
  const points = [...grid.slice(0, 3), transition] as typeof grid;
  await store.registerSweep(sweepOf('views', points.length, questions));
  await store.registerSweep(sweepOf('another', 1, [questions[0]]));
  await store.enrol('views', points);
  await store.enrol('another', [points[0]]);
  const [followed] = await store.followUp('views', [questionRecord(7)]);
  const warned = measured(undefined, {
    accessible_dimension: 3000,
    flags: ['underresolved', 'doubtful'],
    flag_reasons: ['weights underflow', 'a check failed'],
  });
  await store.save({
    points: [
      pointResult(points[0], warned),
      pointResult(points[2], measured(undefined, { hilbert_dimension: Infinity })),
      pointResult(transition),
    ],
    cells: [
      cellResult(points[0], questions[0], {
        decay_rate: -0,
        mean_time: 1 / 3,
        flags: ['resolution-sensitive', 'doubtful'],
        flag_reasons: ['changes when halved', 'a check failed'],
      }),
      cellResult(points[2], questions[0], { capped_mean: Infinity, settling_measurements: null }),
      cellResult(points[2], questions[1], { winding_number: NaN, flags: ['resolution-sensitive'], flag_reasons: ['changes when doubled'] }),
      cellResult(points[2], followed, { recurrent_weight: 5e-324 }),
      cellResult(transition, questions[1], { capped_mean: 1234.5 }),
    ],
    failures: [failureOf(points[1])],
  });
  cells = [];
  for await (const row of store.cells({ sweep: 'views' })) cells.push(row);
});
afterAll(() => database.drop());

const view = (name: string): Promise<ViewRow[]> =>
  database.query<ViewRow>(`select * from windrow.${name} where sweep = 'views' order by ordinal, question`);

describe('phase_cell', () => {
  it('has the columns and the values of an export', async () => {
    const rows = await view('phase_cell');
    expect(Object.keys(rows[0])).toEqual(RECORD_KEYS);
    expect(rows).toHaveLength(12);
    rows.forEach((row, index) => {
      const record = flatRecord(cells[index], 'views');
      for (const key of RECORD_KEYS) expect([key, key === 'ordinal' ? Number(row[key]) : row[key]]).toEqual([key, record[key]]);
    });
    expect(new Set(rows.map((row) => row['status']))).toEqual(new Set(['computed', 'failed', 'missing']));
    expect(rows[0]['flags']).toEqual(['underresolved', 'doubtful', 'resolution-sensitive']);
  });
});

describe('boundary_input', () => {
  it('has the order parameters of the analysis where a cell is computed, and its state', async () => {
    const rows = await view('boundary_input');
    expect(rows).toHaveLength(12);
    const shown = ORDER_PARAMETERS.filter(({ name }) => name in rows[0]);
    expect(shown.map(({ name }) => name)).toEqual(['winding_fraction', 'capped_fraction', 'recurrent_weight', 'sector_fraction']);
    rows.forEach((row, index) => {
      const cell = cells[index];
      expect(row).toMatchObject({
        size: 2,
        coupling: cell.ordinal / 7,
        question: cell.questionOrdinal,
        place: { prepared: cell.coordinates['prepared'] },
      });
      if (cell.fields) for (const { name, value } of shown) expect([index, name, row[name]]).toEqual([index, name, value(cell)]);
    });
    expect(rows.map((row) => row['state'])).toEqual([
      ...['doubtful', 'missing', 'missing'],
      ...['failed', 'failed', 'failed'],
      ...['value', 'value', 'value'],
      ...['missing', 'value', 'missing'],
    ]);
    expect(rows.map((row) => row['sensitive'])).toEqual([true, ...Array<boolean>(6).fill(false), true, ...Array<boolean>(4).fill(false)]);
  });
});
