/** Reading result rows: a cursor over the sweep's points × questions in the grid's order, inside one snapshot. */
import type { ClientBase } from 'pg';
import type { PointFields } from '../../spectral/types.js';
import type { Question } from '../../statistics/types.js';
import type { PointSpec } from '../../sweep/types.js';
import type { CellQuery, CellRow } from '../types.js';
import { cellReader, pointReader } from './columns.js';
import { integers } from './encoding.js';
import { ASKED } from './follow-ups.js';
import { requireSweep } from './sweeps.js';

/** Rows fetched at once: enough that round trips do not count, few enough that memory does not. */
const FETCH = 1000;

// Positions in a row of the cursor.
const CELL = 8;
const POINT = CELL + cellReader.length;

const DECLARE = `
  declare result no scroll cursor for
  select sp.ordinal, sp.coordinates, sp.point_id, p.spec, sq.ordinal, c.id, f.code, f.message,
    ${cellReader.list('c')}, ${pointReader.list('m')}
  from windrow.sweep_point sp
  join windrow.point p on p.id = sp.point_id
  join (${ASKED}) sq on sq.sweep = sp.sweep
  left join windrow.measure m on m.point_id = sp.point_id
  left join windrow.cell c on c.point_id = sp.point_id and c.question_id = sq.question_id
  left join windrow.failure f on f.point_id = sp.point_id
  where sp.sweep = $1 and ($2::integer[] is null or sq.ordinal = any($2)) and ($3::bigint[] is null or sp.ordinal = any($3))
  order by sp.ordinal, sq.ordinal`;

type Row = readonly [
  ordinal: number,
  coordinates: string,
  pointId: string,
  spec: string,
  questionOrdinal: number,
  cellId: string | null,
  code: string | null,
  message: string | null,
  ...fields: unknown[],
];

/** What consecutive rows of one point share; decoded once. */
interface SharedOfPoint {
  readonly ordinal: number;
  readonly coordinates: CellRow['coordinates'];
  readonly spec: PointSpec;
  readonly point: PointFields | null;
}

/**
 * @param client inside a transaction that shows one snapshot
 * @throws sweep.unknown
 */
export async function* readCells(client: ClientBase, { sweep, questions, ordinals }: CellQuery): AsyncGenerator<CellRow> {
  await requireSweep(client, sweep);
  const asked = await readQuestions(client, sweep);
  await client.query(DECLARE, [sweep, ...[questions, ordinals].map((numbers) => (numbers === undefined ? null : integers(numbers)))]);
  let shared: SharedOfPoint | null = null;
  for (;;) {
    const { rows } = await client.query<unknown[]>({ text: `fetch ${FETCH} from result`, rowMode: 'array' });
    for (const raw of rows) {
      const row = raw as unknown as Row;
      if (shared?.ordinal !== row[0]) shared = sharedOf(row);
      yield {
        ordinal: row[0],
        coordinates: shared.coordinates,
        pointId: row[2],
        cellId: row[5],
        spec: shared.spec,
        question: asked.get(row[4])!,
        questionOrdinal: row[4],
        point: shared.point,
        fields: row[5] === null ? null : cellReader.read(row, CELL),
        failure: row[6] === null ? null : { code: row[6], message: row[7] ?? '' },
      };
    }
    if (rows.length < FETCH) return;
  }
}

function sharedOf(row: Row): SharedOfPoint {
  // A column of the measure that is never null tells whether there is one.
  const point = pointReader.read(row, POINT);
  return {
    ordinal: row[0],
    coordinates: JSON.parse(row[1]) as CellRow['coordinates'],
    spec: JSON.parse(row[3]) as PointSpec,
    point: (point.method as string | null) === null ? null : point,
  };
}

async function readQuestions(client: ClientBase, sweep: string): Promise<ReadonlyMap<number, Question>> {
  const { rows } = await client.query<{ ordinal: number; question: string }>(
    `select sq.ordinal, q.question from (${ASKED}) sq join windrow.question q on q.id = sq.question_id where sq.sweep = $1`,
    [sweep],
  );
  return new Map(rows.map(({ ordinal, question }) => [ordinal, JSON.parse(question) as Question]));
}
