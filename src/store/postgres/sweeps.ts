/** Sweeps: registration, lookup, state, enrolment of grid points, progress. */
import type { ClientBase } from 'pg';
import { WindrowError } from '../../core/errors.js';
import type { Json } from '../../core/json.js';
import type { GridPoint, PointSpec, QuestionRecord } from '../../sweep/types.js';
import type { MissingPoint, NewSweep, SweepProgress, SweepRecord } from '../types.js';
import { id, ids } from './encoding.js';
import { idColumn, inserter, integerColumn, jsonColumn, sortedBy, textColumn } from './insert.js';
import { addPoints } from './save.js';

export const insertQuestions = inserter<Omit<QuestionRecord, 'ordinal'>>('windrow.question', [
  idColumn('id', (question) => question.id),
  jsonColumn('question', ({ question }) => question),
]);

const insertSweepQuestions = inserter<QuestionRecord & { readonly sweep: string }>('windrow.sweep_question', [
  textColumn('sweep', ({ sweep }) => sweep),
  integerColumn('ordinal', ({ ordinal }) => ordinal),
  idColumn('question_id', (question) => question.id),
]);

const insertSweepPoints = inserter<GridPoint & { readonly sweep: string }>('windrow.sweep_point', [
  textColumn('sweep', ({ sweep }) => sweep),
  integerColumn('ordinal', ({ ordinal }) => ordinal),
  idColumn('point_id', (point) => point.id),
  jsonColumn('coordinates', ({ coordinates }) => coordinates),
]);

/** @throws sweep.differs */
export async function registerSweep(client: ClientBase, sweep: NewSweep): Promise<SweepRecord> {
  const { name, digest, document, methodVersion, points, questions } = sweep;
  await insertQuestions(
    client,
    sortedBy(questions, (question) => question.id),
  );
  const inserted = await client.query(
    `insert into windrow.sweep (name, digest, document, method_version, points) values ($1, $2, $3, $4, $5) on conflict do nothing`,
    [name, id(digest), JSON.stringify(document), methodVersion, points],
  );
  if (inserted.rowCount === 1)
    await insertSweepQuestions(
      client,
      questions.map((question) => ({ ...question, sweep: name })),
    );
  const [record] = await readSweeps(client, name);
  if (record === undefined) throw new WindrowError('internal.invariant', 'a registered sweep is missing', { where: name });
  refuseDifferent(record, sweep);
  return record;
}

function refuseDifferent(stored: SweepRecord, given: Pick<SweepRecord, 'name' | 'digest' | 'methodVersion'>): void {
  const advice = `choose another name than '${given.name}', or run the stored sweep`;
  if (stored.digest !== given.digest)
    throw new WindrowError('sweep.differs', `the store holds another sweep under this name; ${advice}`, {
      where: `sweep ${given.name}`,
      found: `digest ${given.digest.slice(0, 12)}`,
      allowed: `digest ${stored.digest.slice(0, 12)}`,
    });
  if (stored.methodVersion !== given.methodVersion)
    throw new WindrowError('sweep.differs', `the stored sweep of this name was made by another version of the methods; ${advice}`, {
      where: `sweep ${given.name}`,
      found: `method version ${given.methodVersion}`,
      allowed: `method version ${stored.methodVersion}`,
    });
}

interface SweepRow {
  readonly name: string;
  readonly digest: string;
  readonly document: string;
  readonly method_version: string;
  readonly points: number;
  readonly state: SweepRecord['state'];
  readonly created: string;
  readonly updated: string;
  readonly questions: string;
  readonly follow_ups: string;
}

/** The questions of sweep `s` in one of the two tables that name them, as JSON. */
const questionsIn = (table: string): string => `coalesce((
       select jsonb_agg(jsonb_build_object('id', encode(q.id, 'hex'), 'ordinal', t.ordinal, 'question', q.question) order by t.ordinal)
       from ${table} t join windrow.question q on q.id = t.question_id where t.sweep = s.name), '[]')`;

/** Sweeps by age, or the one of that name. */
export async function readSweeps(client: ClientBase, name: string | null = null): Promise<readonly SweepRecord[]> {
  const { rows } = await client.query<SweepRow>(
    `select s.*, ${questionsIn('windrow.sweep_question')} as questions, ${questionsIn('windrow.follow_up')} as follow_ups
     from windrow.sweep s
     where $1::text is null or s.name = $1 order by s.created, s.name`,
    [name],
  );
  return rows.map((row) => ({
    name: row.name,
    digest: row.digest,
    document: JSON.parse(row.document) as Json,
    methodVersion: row.method_version,
    points: row.points,
    questions: JSON.parse(row.questions) as QuestionRecord[],
    followUps: JSON.parse(row.follow_ups) as QuestionRecord[],
    state: row.state,
    created: row.created,
    updated: row.updated,
  }));
}

/** @throws sweep.unknown */
export async function setSweepState(client: ClientBase, name: string, state: SweepRecord['state']): Promise<void> {
  const { rowCount } = await client.query('update windrow.sweep set state = $2, updated = now() where name = $1', [name, state]);
  if (rowCount === 0) throw unknownSweep(name);
}

export function unknownSweep(name: string): WindrowError {
  return new WindrowError('sweep.unknown', `the store holds no sweep '${name}'; \`windrow status\` lists them`, { found: name });
}

/** @throws sweep.unknown */
export async function requireSweep(client: ClientBase, name: string): Promise<void> {
  const { rowCount } = await client.query('select from windrow.sweep where name = $1', [name]);
  if (rowCount === 0) throw unknownSweep(name);
}

/**
 * Enrols the points and says what of them is missing: in the order given, each id once.
 * @throws sweep.unknown
 */
export async function enrol(client: ClientBase, sweep: string, points: readonly GridPoint[]): Promise<readonly MissingPoint[]> {
  await requireSweep(client, sweep);
  await addPoints(client, points);
  const inOrder = [...points].sort((a, b) => a.ordinal - b.ordinal);
  await insertSweepPoints(
    client,
    inOrder.map((point) => ({ ...point, sweep })),
  );
  const { rows } = await client.query<{ id: string; measured: boolean; open: string[]; code: string | null; message: string | null }>(
    `select w.id, m.point_id is not null as measured, f.code, f.message, array(
       select encode(sq.question_id, 'hex') from windrow.sweep_question sq
       where sq.sweep = $1 and not exists (
         select from windrow.cell c where c.point_id = w.id and c.question_id = sq.question_id)
       order by sq.ordinal) as open
     from unnest($2::bytea[]) with ordinality as w(id, place)
     left join windrow.measure m on m.point_id = w.id
     left join windrow.failure f on f.point_id = w.id
     order by w.place`,
    [sweep, ids(new Set(points.map((point) => point.id)))],
  );
  return rows
    .filter(({ measured, open }) => !measured || open.length > 0)
    .map(({ id: pointId, measured, open, code, message }) => ({
      id: pointId,
      measured,
      questionIds: [...new Set(open)],
      failure: code === null ? null : { code, message: message ?? '' },
    }));
}

/** @throws sweep.unknown */
export async function readRefinements(client: ClientBase, sweep: string): Promise<readonly GridPoint[]> {
  await requireSweep(client, sweep);
  const { rows } = await client.query<{ id: string; ordinal: number; spec: string; coordinates: string }>(
    `select encode(p.id, 'hex') as id, sp.ordinal, p.spec, sp.coordinates
     from windrow.sweep s join windrow.sweep_point sp on sp.sweep = s.name and sp.ordinal >= s.points
     join windrow.point p on p.id = sp.point_id
     where s.name = $1 order by sp.ordinal`,
    [sweep],
  );
  return rows.map(({ id: pointId, ordinal, spec, coordinates }) => ({
    id: pointId,
    ordinal,
    spec: JSON.parse(spec) as PointSpec,
    coordinates: JSON.parse(coordinates) as GridPoint['coordinates'],
  }));
}

/** Groups of failures told apart in a progress report, the most frequent first. */
const FAILURE_GROUPS = 50;

/** @throws sweep.unknown */
export async function readProgress(client: ClientBase, sweep: string): Promise<SweepProgress> {
  const counts = await client.query<Omit<SweepProgress, 'failures'>>(
    `select e.points, e.points * (select count(*) from windrow.sweep_question where sweep = s.name) as cells,
       (select count(*) from windrow.sweep_point sp join windrow.measure m using (point_id) where sp.sweep = s.name) as "storedPoints",
       (select count(*) from windrow.sweep_point sp join windrow.cell c using (point_id)
          join windrow.sweep_question sq on sq.sweep = sp.sweep and sq.question_id = c.question_id
        where sp.sweep = s.name) as "storedCells",
       (select count(*) from windrow.sweep_point sp join windrow.failure f using (point_id) where sp.sweep = s.name) as "failedPoints"
     from windrow.sweep s cross join lateral (
       select s.points + count(*) as points from windrow.sweep_point sp where sp.sweep = s.name and sp.ordinal >= s.points
     ) e
     where s.name = $1`,
    [sweep],
  );
  const [row] = counts.rows;
  if (row === undefined) throw unknownSweep(sweep);
  if (row.failedPoints === 0) return { ...row, failures: [] };
  const failures = await client.query<SweepProgress['failures'][number]>(
    `select f.code, f.message, count(*) as count
     from windrow.sweep_point sp join windrow.failure f using (point_id) where sp.sweep = $1
     group by f.code, f.message order by count desc, f.code, f.message limit ${FAILURE_GROUPS}`,
    [sweep],
  );
  return { ...row, failures: failures.rows };
}
