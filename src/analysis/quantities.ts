/**
 * What can be mapped, cut or searched for a boundary: every numeric field of a result row, and the order parameters made from them.
 *
 * An order parameter is a number between 0 and 1 that tells how much of the space accessible to the detected state a measurement record shows.
 */
import { WindrowError } from '../core/errors.js';
import { CELL_FIELDS, POINT_FIELDS } from '../sweep/fields.js';
import type { CellRow } from '../store/types.js';

export interface Quantity {
  readonly name: string;
  /** '1' dimensionless, 'energy', 'time', 'measurement', … */
  readonly unit: string;
  readonly meaning: string;
  /** Takes whole numbers only, so that figures need no decimals. */
  readonly integer: boolean;
  /** null where the row has no such number */
  readonly value: (row: CellRow) => number | null;
}

function stored(row: CellRow, name: string): number | null {
  const value = (row.fields as Record<string, unknown> | null)?.[name] ?? (row.point as Record<string, unknown> | null)?.[name];
  return typeof value === 'number' && Number.isFinite(value) ? value : null;
}

function share(part: number | null, whole: number | null): number | null {
  return part === null || whole === null || whole <= 0 ? null : part / whole;
}

/**
 * The mean number of measurements that the budget K can show. A return needs accessible_dimension measurements on average, so no budget
 * shows more than min(K, accessible_dimension); a transition may stay undetected for all K.
 */
function showable(row: CellRow): number | null {
  const accessible = stored(row, 'accessible_dimension');
  if (row.spec.detected !== 'same') return row.question.budget;
  return accessible === null ? null : Math.min(row.question.budget, accessible);
}

const order = (name: string, meaning: string, value: Quantity['value']): Quantity => ({ name, unit: '1', meaning, integer: false, value });

/** The order parameters of a boundary; the first is the default. */
export const ORDER_PARAMETERS: readonly [Quantity, ...Quantity[]] = [
  order('winding_fraction', 'winding_number / accessible_dimension', (row) =>
    share(stored(row, 'winding_number'), stored(row, 'accessible_dimension')),
  ),
  order('capped_fraction', 'capped_mean / what the budget can show', (row) => share(stored(row, 'capped_mean'), showable(row))),
  order('recurrent_weight', 'Σ |q|², levels merged at the resolution', (row) => stored(row, 'recurrent_weight')),
  order('sector_fraction', 'sector_dimension / hilbert_dimension', (row) =>
    share(stored(row, 'sector_dimension'), stored(row, 'hilbert_dimension')),
  ),
  order('largest_sector_fraction', 'largest sector / hilbert_dimension, where sectors were counted', (row) =>
    stored(row, 'largest_sector_fraction'),
  ),
];

const FIELD_QUANTITIES: readonly Quantity[] = [...CELL_FIELDS, ...POINT_FIELDS]
  .filter(({ type }) => type === 'float' || type === 'integer')
  .map(({ name, unit, meaning, type }) => ({ name, unit, meaning, integer: type === 'integer', value: (row) => stored(row, name) }));

/** Every quantity by name; order parameters first. */
export const QUANTITIES: ReadonlyMap<string, Quantity> = new Map(
  [...FIELD_QUANTITIES, ...ORDER_PARAMETERS].map((quantity) => [quantity.name, quantity]),
);

/** @throws WindrowError `analysis.field` */
export function findQuantity(name: string): Quantity {
  const quantity = QUANTITIES.get(name);
  if (quantity) return quantity;
  throw new WindrowError('analysis.field', 'no such field in the results', {
    where: '--field',
    found: name,
    allowed: [...QUANTITIES.keys()].join(', '),
  });
}
