/**
 * Rows of an invented junction for tests of maps and figures: the winding number falls from N + 1 to 2 around a coupling of 2, the
 * steeper the larger N. A logistic function, not physics; its crossings are known exactly.
 */
import type { Question } from '../../src/statistics/types.js';
import type { CellRow } from '../../src/store/types.js';
import { cellRow, TWO_LEVEL_QUESTION } from './two-level-rows.js';

export const SCHEDULES: readonly Question['schedule'][] = [
  { family: 'exponential', mean: 0.25 },
  { family: 'fixed', interval: 0.37 },
  { family: 'gamma', mean: 0.5, shape: 2.5, 'dead-time': 0.1 },
];

/** Winding fraction 1/2 lies at coupling 2 + 2/N. */
export function syntheticFraction(size: number, coupling: number): number {
  return 1 / (1 + Math.exp((size / 8) * (coupling - 2 - 2 / size)));
}

export function syntheticRows(
  sizes: readonly number[],
  couplings: readonly number[],
  special: (row: CellRow, size: number, coupling: number) => CellRow = (row) => row,
  schedules = SCHEDULES,
): CellRow[] {
  let ordinal = 0;
  return sizes.flatMap((size) =>
    couplings.flatMap((coupling) => {
      const at = ordinal++;
      return schedules.map((schedule, questionOrdinal) => {
        const fraction = syntheticFraction(size, coupling);
        const winding = 2 + Math.round((size - 1) * fraction);
        const row = cellRow({
          size,
          coupling,
          ordinal: at,
          questionOrdinal,
          question: { ...TWO_LEVEL_QUESTION, schedule, budget: 2000 },
          point: { accessible_dimension: size + 1, hilbert_dimension: size + 1, sector_dimension: size + 1 },
          cell: {
            winding_number: winding,
            capped_mean: 1 + size * fraction,
            recurrent_weight: 0.5 - 0.4 * fraction,
            resolution_energy: 0.002,
            resolution_weight: 0.0005,
          },
        });
        return special(row, size, coupling);
      });
    }),
  );
}
