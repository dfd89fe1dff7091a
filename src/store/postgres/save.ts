/**
 * Writing results: points with their measures, cells, failures.
 *
 * Every transaction touches the tables in one order (point, measure, cell, failure) and the rows of a table by ascending key, so
 * workers that save the same rows at once wait for each other and never deadlock.
 */
import type { ClientBase } from 'pg';
import type { SpectralMeasure } from '../../spectral/types.js';
import { METHOD_VERSION } from '../../sweep/identity.js';
import type { CellResult, PointFailure, PointResult, PointSpec } from '../../sweep/types.js';
import type { SaveBatch } from '../types.js';
import { cellColumns, pointColumns } from './columns.js';
import { ids } from './encoding.js';
import { doubleColumn, doublesColumn, idColumn, inserter, jsonColumn, sortedBy, textColumn } from './insert.js';

interface Identified {
  readonly id: string;
  readonly spec: PointSpec;
}

const insertPoints = inserter<Identified>('windrow.point', [
  idColumn('id', (point) => point.id),
  jsonColumn('spec', (point) => point.spec),
  textColumn('method_version', () => METHOD_VERSION),
]);

const insertMeasures = inserter<PointResult>('windrow.measure', [
  idColumn('point_id', (point) => point.id),
  doublesColumn('energies', ({ measured }) => measured.measure.energies),
  doublesColumn('weights', ({ measured }) => measured.measure.weights),
  doublesColumn('overlap_re', ({ measured }) => (isReturn(measured.measure) ? null : measured.measure.overlapRe)),
  doublesColumn('overlap_im', ({ measured }) => measured.measure.overlapIm),
  doubleColumn('state_overlap_re', ({ measured }) => measured.overlap[0]),
  doubleColumn('state_overlap_im', ({ measured }) => measured.overlap[1]),
  ...pointColumns<PointResult>(({ measured }) => measured.fields),
]);

const insertCells = inserter<CellResult>('windrow.cell', [
  idColumn('point_id', (cell) => cell.pointId),
  idColumn('question_id', (cell) => cell.questionId),
  idColumn('id', (cell) => cell.id),
  ...cellColumns<CellResult>((cell) => cell.fields),
]);

const insertFailures = inserter<PointFailure>('windrow.failure', [
  idColumn('point_id', (failure) => failure.id),
  textColumn('code', (failure) => failure.code),
  textColumn('message', (failure) => failure.message),
]);

/** Makes points known, measured or not. */
export function addPoints(client: ClientBase, points: readonly Identified[]): Promise<void> {
  return insertPoints(
    client,
    sortedBy(points, ({ id }) => id),
  );
}

/** One transaction's work; a failure in the batch stands, one of an earlier batch is cleared by the saved point. */
export async function saveBatch(client: ClientBase, { points, cells, failures }: SaveBatch): Promise<void> {
  await addPoints(client, [...points, ...failures]);
  const measured = sortedBy(points, ({ id }) => id);
  await insertMeasures(client, measured);
  await insertCells(
    client,
    sortedBy(cells, (cell) => cell.pointId + cell.questionId),
  );
  if (measured.length > 0) await deleteFailures(client, 'point_id = any($1::bytea[])', [ids(measured.map(({ id }) => id))]);
  await insertFailures(
    client,
    sortedBy(failures, ({ id }) => id),
  );
}

/** @param condition on rows of windrow.failure; @returns how many were deleted */
export async function deleteFailures(client: ClientBase, condition: string, parameters: readonly unknown[]): Promise<number> {
  const { rowCount } = await client.query(
    `delete from windrow.failure where point_id in
       (select point_id from windrow.failure where ${condition} order by point_id for update)`,
    [...parameters],
  );
  return rowCount ?? 0;
}

/** The overlaps are the weights: they are then stored once. */
function isReturn({ weights, overlapRe, overlapIm }: SpectralMeasure): boolean {
  if (overlapIm !== null) return false;
  return overlapRe === weights || (overlapRe.length === weights.length && overlapRe.every((q, j) => Object.is(q, weights[j])));
}
