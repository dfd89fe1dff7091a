/** Reading measures back. */
import type { ClientBase } from 'pg';
import { WindrowError } from '../../core/errors.js';
import type { MeasuredPoint } from '../../spectral/types.js';
import { pointReader } from './columns.js';
import { ids } from './encoding.js';

type Row = readonly [
  id: string,
  energies: Float64Array,
  weights: Float64Array,
  overlapRe: Float64Array | null,
  overlapIm: Float64Array | null,
  stateOverlapRe: number,
  stateOverlapIm: number,
  ...fields: unknown[],
];

const SELECT = `
  select m.point_id, m.energies, m.weights, m.overlap_re, m.overlap_im, m.state_overlap_re, m.state_overlap_im, ${pointReader.list('m')}
  from windrow.measure m where m.point_id = any($1::bytea[])`;

/**
 * Yields [id, measure] of those ids that are stored, in no particular order.
 * @throws store.data for a measure whose arrays do not fit together
 */
export async function* readMeasures(client: ClientBase, wanted: readonly string[]): AsyncGenerator<readonly [string, MeasuredPoint]> {
  if (wanted.length === 0) return;
  const { rows } = await client.query<unknown[]>({ text: SELECT, values: [ids(wanted)], rowMode: 'array' });
  for (const row of rows) yield decode(row as unknown as Row);
}

function decode(row: Row): readonly [string, MeasuredPoint] {
  const [id, energies, weights, overlapRe, overlapIm, re, im] = row;
  const levels = energies.length;
  if ([weights, overlapRe ?? weights, overlapIm ?? weights].some((array) => array.length !== levels))
    throw new WindrowError('store.data', 'a stored measure has arrays of different lengths', { where: `windrow.measure ${id}` });
  // The return problem is one array under two names, as the kernels make it.
  const measure = { energies, weights, overlapRe: overlapRe ?? weights, overlapIm };
  return [id, { measure, fields: pointReader.read(row, 7), overlap: [re, im] }];
}
