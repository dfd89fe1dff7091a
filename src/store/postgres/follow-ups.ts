/** Follow-ups: questions asked of a sweep after it was swept. */
import type { ClientBase } from 'pg';
import type { QuestionRecord } from '../../sweep/types.js';
import { id, ids } from './encoding.js';
import { sortedBy } from './insert.js';
import { insertQuestions, unknownSweep } from './sweeps.js';

/** Whatever was asked of sweeps, swept or followed up: sweep, ordinal, question_id. */
export const ASKED =
  'select sweep, ordinal, question_id from windrow.sweep_question union all select sweep, ordinal, question_id from windrow.follow_up';

/** @throws sweep.unknown */
export async function enrolFollowUps(
  client: ClientBase,
  sweep: string,
  questions: readonly Omit<QuestionRecord, 'ordinal'>[],
): Promise<readonly QuestionRecord[]> {
  // Numbers are given by one process at a time.
  const { rowCount } = await client.query('select from windrow.sweep where name = $1 for update', [sweep]);
  if (rowCount === 0) throw unknownSweep(sweep);
  await insertQuestions(
    client,
    sortedBy(questions, (question) => question.id),
  );
  const { rows } = await client.query<{ id: string; ordinal: number }>(
    `select encode(question_id, 'hex') as id, min(ordinal) as ordinal from (${ASKED}) asked
     where sweep = $1 and question_id = any($2::bytea[]) group by question_id`,
    [sweep, ids(new Set(questions.map((question) => question.id)))],
  );
  const ordinals = new Map(rows.map((row) => [row.id, row.ordinal]));
  const last = await client.query<{ next: number }>(`select coalesce(max(ordinal) + 1, 0) as next from (${ASKED}) asked where sweep = $1`, [
    sweep,
  ]);
  let { next } = last.rows[0];
  for (const { id: question } of questions) {
    if (ordinals.has(question)) continue;
    await client.query('insert into windrow.follow_up (sweep, ordinal, question_id) values ($1, $2, $3)', [sweep, next, id(question)]);
    ordinals.set(question, next++);
  }
  return questions.map((question) => ({ ...question, ordinal: ordinals.get(question.id)! }));
}
