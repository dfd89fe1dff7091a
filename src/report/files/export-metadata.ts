/**
 * What a file for other tools says about itself: the sweep and its file, the method version, the questions with their resolution, the
 * unit and meaning of every field, and digests. Parquet and .npz carry it inside, CSV and JSON lines in a file beside them.
 */
import type { Json } from '../../core/json.js';
import type { CellRow, SweepRecord } from '../../store/types.js';
import { CELL_FIELDS, type FieldDeclaration, FLAG_FIELDS, POINT_FIELDS } from '../../sweep/fields.js';
import type { Grid } from '../../sweep/types.js';

/** Rows of an export, by what became of them. */
export interface Tally {
  rows: number;
  computed: number;
  failed: number;
  missing: number;
}

export interface ExportSource {
  readonly record: SweepRecord;
  readonly grid: Pick<Grid, 'axes'>;
  /** numbers of the questions that are exported; all when absent */
  readonly questions?: readonly number[] | undefined;
}

/** Key of the metadata in a Parquet footer and name of the array in an .npz. */
export const METADATA_KEY = 'windrow';

/** Changes when a reader of an older form would misread the metadata. */
const FORM = 1;

export const emptyTally = (): Tally => ({ rows: 0, computed: 0, failed: 0, missing: 0 });

/** Passes rows on and counts them. */
export async function* tallied(rows: AsyncIterable<CellRow>, tally: Tally): AsyncIterable<CellRow> {
  for await (const row of rows) {
    tally.rows++;
    tally[row.fields ? 'computed' : row.failure ? 'failed' : 'missing']++;
    yield row;
  }
}

const declarations = (fields: readonly FieldDeclaration[]): Json =>
  fields.map(({ name, type, unit, nullable, meaning }) => ({ name, type, unit, nullable, meaning }));

/** @param tally complete, so after the last row */
export function exportMetadata({ record, grid, questions }: ExportSource, tally: Tally): { readonly [key: string]: Json } {
  const asked = [
    ...record.questions.map((question) => ({ ...question, follow_up: false })),
    ...record.followUps.map((question) => ({ ...question, follow_up: true })),
  ].filter(({ ordinal }) => questions?.includes(ordinal) ?? true);
  return {
    form: FORM,
    sweep: {
      name: record.name,
      digest: record.digest,
      document: record.document,
      method_version: record.methodVersion,
      points: record.points,
      state: record.state,
      created: record.created,
    },
    axes: grid.axes.map(({ name, unit, values }) => ({ name, unit, values })),
    questions: asked.map(({ ordinal, id, question, follow_up }) => ({
      ordinal,
      id,
      follow_up,
      schedule: question.schedule,
      resolution: question.resolution,
      budget: question.budget,
      efficiency: question.detector.efficiency,
      sampling: question.sampling,
    })),
    rows: { ...tally },
    point_fields: declarations(POINT_FIELDS),
    cell_fields: declarations(CELL_FIELDS),
    flag_fields: declarations(FLAG_FIELDS),
  };
}
