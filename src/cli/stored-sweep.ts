/** A sweep in the store as commands read it: its grid, its words, and samples of its rows. */
import { WindrowError } from '../core/errors.js';
import type { Quantity } from '../analysis/quantities.js';
import { type Average, collectSamples, type Coordinates, type Sample } from '../analysis/samples.js';
import { AVERAGED_AXES } from '../analysis/curves.js';
import { samplesAt } from '../analysis/cut.js';
import { findModel } from '../models/registry.js';
import { stateText } from '../report/format.js';
import { type SweepLabels, sweepLabels } from '../report/labels.js';
import type { CellRow, ResultStore, SweepRecord } from '../store/types.js';
import { expandGrid } from '../sweep/grid.js';
import { documentFromJson } from '../sweep/read.js';
import type { Grid } from '../sweep/types.js';

export interface StoredSweep {
  readonly record: SweepRecord;
  readonly grid: Grid;
  readonly labels: SweepLabels;
  /** Sentences for captions: the states and the parameters that are the same everywhere. */
  readonly notes: readonly string[];
}

/** @throws WindrowError `sweep.unknown`, with the names that exist */
export async function findStoredSweep(store: ResultStore, name: string): Promise<SweepRecord> {
  const record = await store.findSweep(name);
  if (record) return record;
  const known = (await store.listSweeps()).map((sweep) => sweep.name);
  throw new WindrowError('sweep.unknown', 'no sweep of this name in the store', {
    found: name,
    allowed: known.length === 0 ? 'none yet: run `windrow sweep FILE` first' : known.join(', '),
  });
}

function notesOf(grid: Grid): string[] {
  const { spec } = grid.pointAt(0);
  const axes = new Set(grid.axes.map(({ name }) => name));
  const last = grid.pointAt(grid.points - 1).spec.parameters;
  // A parameter may follow the size, such as the number of particles; then it is not the same everywhere.
  const fixed = Object.entries(spec.parameters).filter(
    ([name, value]) => !axes.has(name) && value !== null && JSON.stringify(last[name]) === JSON.stringify(value),
  );
  const states = ['prepare', 'detect'].some((axis) => axes.has(axis))
    ? []
    : spec.detected === 'same'
      ? [`Prepared and detected state: ${stateText(spec.prepared)}.`]
      : [`Prepared: ${stateText(spec.prepared)}; detected: ${stateText(spec.detected)}.`];
  const parameters = fixed.map(([name, value]) => `${name} = ${typeof value === 'object' ? JSON.stringify(value) : String(value)}`);
  return [...states, ...(parameters.length === 0 ? [] : [`${parameters.join(', ')}.`])];
}

/** @throws WindrowError `sweep.unknown` */
export async function readStoredSweep(store: ResultStore, name: string): Promise<StoredSweep> {
  const record = await findStoredSweep(store, name);
  const grid = expandGrid(documentFromJson(record.document));
  return { record, grid, labels: sweepLabels(grid, findModel(grid.model)), notes: notesOf(grid) };
}

/** The sweep with a sentence for captions on how its realisations are averaged, where it has any. */
export function withAverage(sweep: StoredSweep, average: Average = 'mean'): StoredSweep {
  const count = sweep.grid.axes.find(({ name }) => AVERAGED_AXES.includes(name))?.values.length ?? 1;
  if (count < 2) return sweep;
  const what = average === 'typical' ? 'Typical values exp⟨ln x⟩' : 'Means';
  return { ...sweep, notes: [...sweep.notes, `${what} over ${count} realisations, with one standard error where bars are drawn.`] };
}

/** @throws WindrowError `cli.usage` for a question that was neither swept nor followed up */
export function requireQuestions({ record }: Pick<StoredSweep, 'record'>, questions: readonly number[]): void {
  const last = record.questions.length + record.followUps.length - 1;
  const foreign = questions.find((ordinal) => ordinal > last);
  if (foreign === undefined) return;
  throw new WindrowError('cli.usage', 'no such question in the sweep', {
    where: '--question',
    found: String(foreign),
    allowed: `0 to ${last}, as \`windrow status ${record.name}\` lists them`,
  });
}

export interface Selection {
  /** Numbers of questions; all when absent. */
  readonly questions?: readonly number[] | undefined;
  readonly at?: Coordinates;
  /** How disorder realisations are averaged; the mean when absent. */
  readonly average?: Average | undefined;
  /** Also the points that a refinement put between those of the grid; they stand on no axis, so maps and cuts go without. */
  readonly refined?: boolean;
}

async function* onGrid(rows: AsyncIterable<CellRow>, points: number): AsyncGenerator<CellRow> {
  for await (const row of rows) if (row.ordinal < points) yield row;
}

/** The axis that refinements put points on. */
export const REFINED_AXIS = 'coupling';

/**
 * Samples of one quantity, streamed from the store.
 * @throws WindrowError `analysis.axis` for a place that is not on the grid
 */
export async function readSamples(
  store: ResultStore,
  sweep: StoredSweep,
  quantity: Quantity,
  { questions, at = {}, average = 'mean', refined = false }: Selection,
): Promise<Sample[]> {
  const rows = store.cells({ sweep: sweep.grid.name, ...(questions === undefined ? {} : { questions }) });
  const samples = samplesAt(await collectSamples(refined ? rows : onGrid(rows, sweep.grid.points), quantity), at);
  return average === 'mean' ? samples : samples.map((sample) => ({ ...sample, average }));
}
