/** Comparison of two sweeps: matching of rows and counts. Expectations are by construction; no outside numbers. */
import { describe, expect, it } from 'vitest';
import { compareRows } from '../../../src/analysis/compare.js';
import type { CellRow } from '../../../src/store/types.js';
import { cellRow, type RowChange } from '../../support/two-level-rows.js';

async function* stream(rows: readonly CellRow[]): AsyncGenerator<CellRow> {
  for (const row of rows) yield await Promise.resolve(row);
}
const rows = (changes: readonly RowChange[]): CellRow[] => changes.map((change, ordinal) => cellRow({ ordinal, ...change }));
const compare = (a: readonly CellRow[], b: readonly CellRow[], tolerance = 1e-9) => compareRows(stream(a), stream(b), tolerance);

describe('two sweeps', () => {
  const three = rows([{ coupling: 1 }, { coupling: 2 }, { coupling: 3 }]);

  it('that are the same are identical in every value, whatever the order of rows', async () => {
    for (const other of [three, [...three].reverse()]) {
      const { values, ...counts } = await compare(three, other);
      expect(counts).toEqual({ common: 3, only_a: 0, only_b: 0, answered_only_a: 0, answered_only_b: 0, open: 0 });
      expect(values.compared).toBeGreaterThan(3 * 30);
      expect(values.identical).toBe(values.compared);
      expect(values.differences).toEqual([]);
    }
  });

  it('are told apart where they differ: changed, within tolerance, missing, answered in one only', async () => {
    const other = rows([
      { coupling: 1, cell: { capped_mean: 2 + 1e-12 } },
      { coupling: 2, cell: { winding_number: 1 }, point: { bright_levels: 1 } },
      { coupling: 3, state: 'failed' },
      { coupling: 4 },
    ]);
    const { values, ...counts } = await compare(
      [...three, ...rows([{ coupling: 5 }]), ...rows([{ coupling: 6, state: 'missing' }])],
      [...other, ...rows([{ coupling: 6, state: 'missing' }])],
    );
    expect(counts).toEqual({ common: 4, only_a: 1, only_b: 1, answered_only_a: 1, answered_only_b: 0, open: 1 });
    expect(values).toMatchObject({ within: 1, beyond: 2 });
    expect(values.differences.map(({ field, question, coordinates }) => [field, question, coordinates['coupling']])).toEqual([
      ['bright_levels', null, 2],
      ['winding_number', 0, 2],
      ['capped_mean', 0, 1],
    ]);
  });

  it('have nothing in common under different questions, and a place twice is matched once', async () => {
    const [row] = three;
    expect(await compare([row], [{ ...row, question: { ...row.question, budget: 7 } }])).toMatchObject({ common: 0, only_a: 1, only_b: 1 });
    expect(await compare([row, row], [row])).toMatchObject({ common: 1, only_a: 1, only_b: 0 });
  });

  it('end both streams when one fails', async () => {
    let ended = false;
    async function* endless(): AsyncGenerator<CellRow> {
      try {
        for (;;) yield await Promise.resolve(three[0]);
      } finally {
        ended = true;
      }
    }
    async function* failing(): AsyncGenerator<CellRow> {
      yield await Promise.resolve(three[1]);
      throw new Error('lost');
    }
    await expect(compareRows(endless(), failing(), 0)).rejects.toThrow('lost');
    expect(ended).toBe(true);
  });
});
