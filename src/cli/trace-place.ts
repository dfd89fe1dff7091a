/** Which point and which questions `trace` is about: a place of a stored sweep or of a file, or any other point close to it. */
import { existsSync } from 'node:fs';
import { samePlace } from '../analysis/cut.js';
import type { Coordinates } from '../analysis/samples.js';
import { WindrowError } from '../core/errors.js';
import type { Json } from '../core/json.js';
import type { ResultStore, SweepRecord } from '../store/types.js';
import { expandGrid } from '../sweep/grid.js';
import { readSweepFile } from '../sweep/read-file.js';
import { documentFromJson } from '../sweep/read.js';
import type { Grid, GridPoint, QuestionRecord } from '../sweep/types.js';
import { askedQuestions, asksFollowUp, type FollowUpOptions } from './follow-up-options.js';
import { parsePairs, parseQuestions } from './options.js';
import { type Document, override } from './point-document.js';
import { findStoredSweep } from './stored-sweep.js';

export interface TracePlace {
  readonly grid: Grid;
  readonly point: GridPoint;
  readonly questions: readonly QuestionRecord[];
  /** the store that may hold the measure; null for a file */
  readonly store: ResultStore | null;
}

/** Position of the one grid point at these values. @throws WindrowError `cli.usage` naming the axes left open */
export function ordinalAt({ axes, points }: Pick<Grid, 'axes' | 'points'>, at: Coordinates): number {
  const open = axes.filter(({ name, values }) => values.length > 1 && !(name in at));
  if (open.length > 0) {
    throw new WindrowError('cli.usage', 'a trace is about one point', {
      where: '--set',
      found: `${points} points`,
      allowed: `one value for each of ${open.map(({ name, values }) => `${name} (${values.length} values)`).join(', ')}`,
    });
  }
  return axes.reduce((ordinal, { name, values }) => {
    const index = values.length === 1 ? 0 : values.findIndex((value) => samePlace({ [name]: value }, { [name]: at[name] }));
    return ordinal * values.length + index;
  }, 0);
}

/** Splits `--set` into values that stand on an axis of the grid, and changes of the document. */
function placeOn(document: Document, set: readonly string[] | undefined): { readonly document: Document; readonly at: Coordinates } {
  const { axes } = expandGrid(documentFromJson(document as Json));
  const at: Record<string, number | string> = {};
  const changes: [string, unknown][] = [];
  for (const [key, value] of parsePairs('--set', set ?? [])) {
    const word = typeof value === 'number' || typeof value === 'string' ? value : null;
    const found = axes.find(({ name }) => name === key)?.values.find((own) => word !== null && samePlace({ [key]: own }, { [key]: word }));
    if (found === undefined) changes.push([key, value]);
    else at[key] = found;
  }
  return { document: changes.length === 0 ? document : override(document, changes), at };
}

function questionsOf(document: Document, record: SweepRecord | null, options: FollowUpOptions): readonly QuestionRecord[] {
  const own = askedQuestions(document as Json, options).map((question, ordinal) => ({ ...question, ordinal }));
  const numbers = parseQuestions(options.question);
  if (numbers === undefined) return own;
  if (asksFollowUp(options)) {
    throw new WindrowError('cli.usage', 'questions are chosen twice', {
      where: '--question',
      allowed: 'numbers of questions, or new ones',
    });
  }
  const known = [...own, ...(record?.followUps ?? [])];
  return numbers.map((number) => {
    const question = known.find(({ ordinal }) => ordinal === number);
    if (question) return question;
    throw new WindrowError('cli.usage', 'no such question', {
      where: '--question',
      found: String(number),
      allowed: known.map(({ ordinal }) => ordinal).join(', '),
    });
  });
}

/**
 * @param source a sweep file where there is one of this name, else a sweep of the store
 * @param openStore called where the store is needed
 * @throws WindrowError cli.usage, sweep.unknown, and whatever a sweep file with such values is refused with
 */
export async function tracePlace(
  source: string,
  options: FollowUpOptions & { readonly set?: string[] },
  openStore: () => Promise<ResultStore>,
): Promise<TracePlace> {
  const store = existsSync(source) ? null : await openStore();
  const record = store === null ? null : await findStoredSweep(store, source);
  const base = record === null ? readSweepFile(source, { allowLarge: true }) : record.document;
  const { document, at } = placeOn(base as unknown as Document, options.set);
  const grid = expandGrid(documentFromJson(document as Json));
  return { grid, store, point: grid.pointAt(ordinalAt(grid, at)), questions: questionsOf(document, record, options) };
}
