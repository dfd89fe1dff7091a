/** `windrow status [NAME]`: the sweeps of the store, or one of them with its questions and failures. */
import type { Command } from 'commander';
import type { Json } from '../../core/json.js';
import { formatCount, formatNumber, scheduleText } from '../../report/format.js';
import { renderPairs, renderTable } from '../../report/table.js';
import type { ResultStore, SweepProgress, SweepRecord } from '../../store/types.js';
import { openStore, storeText } from '../compose.js';
import { type Context, EXIT, type Io } from '../context.js';
import { storeOption, verb } from '../options.js';
import { print } from '../print.js';
import { runVerb } from '../run-verb.js';
import { failureTable } from '../run-and-report.js';
import { followSweep } from '../follow-sweep.js';
import { showWorkers } from '../show-workers.js';
import { findStoredSweep } from '../stored-sweep.js';

interface Options {
  readonly workers?: boolean;
  readonly follow?: boolean;
}

interface Entry {
  readonly record: SweepRecord;
  /** counts the points of refinements, which the record does not */
  readonly progress: SweepProgress;
}

async function entryOf(store: ResultStore, record: SweepRecord): Promise<Entry> {
  return { record, progress: await store.progress(record.name) };
}

const COLUMNS = [
  'sweep',
  'state',
  'points',
  'cells',
  'stored_points',
  'stored_cells',
  'failed_points',
  'method_version',
  'created',
  'updated',
] as const;

function rowOf({ record, progress }: Entry): { readonly [key in (typeof COLUMNS)[number]]: Json } {
  return {
    sweep: record.name,
    state: record.state,
    points: progress.points,
    cells: progress.cells,
    stored_points: progress.storedPoints,
    stored_cells: progress.storedCells,
    failed_points: progress.failedPoints,
    method_version: record.methodVersion,
    created: record.created,
    updated: record.updated,
  };
}

async function printList(context: Context, entries: readonly Entry[]): Promise<void> {
  await print(context, {
    table: () =>
      entries.length === 0
        ? `No sweeps in ${storeText(context.settings)}.`
        : renderTable(entries, [
            { title: 'sweep', value: ({ record }) => record.name },
            { title: 'state', value: ({ record }) => record.state },
            { title: 'points', value: ({ progress }) => formatCount(progress.points), align: 'right' },
            { title: 'cells', value: ({ progress }) => formatCount(progress.cells), align: 'right' },
            { title: 'stored', value: ({ progress }) => formatCount(progress.storedCells), align: 'right' },
            { title: 'failed points', value: ({ progress }) => formatCount(progress.failedPoints), align: 'right' },
            { title: 'updated', value: ({ record }) => record.updated },
          ]),
    json: () => entries.map(rowOf),
    csv: () => ({ columns: COLUMNS, rows: entries.map(rowOf) }),
  });
}

function detailText({ record, progress }: Entry): string {
  const pairs = renderPairs([
    ['sweep', record.name],
    ['state', record.state],
    ['points', `${formatCount(progress.storedPoints)} of ${formatCount(progress.points)} stored`],
    ['cells', `${formatCount(progress.storedCells)} of ${formatCount(progress.cells)} stored`],
    ['failed', `${formatCount(progress.failedPoints)} points`],
    ['created', record.created],
    ['updated', record.updated],
    ['method', record.methodVersion],
  ]);
  const questions = renderTable(
    [...record.questions, ...record.followUps],
    [
      { title: 'question', value: ({ ordinal }) => String(ordinal), align: 'right' },
      { title: 'schedule', value: ({ question }) => scheduleText(question.schedule) },
      { title: 'budget', value: ({ question }) => formatCount(question.budget), align: 'right' },
      {
        title: 'resolution (energy, weight)',
        value: ({ question }) => `${resolution(question.resolution.energy)}, ${resolution(question.resolution.weight)}`,
      },
      { title: 'efficiency', value: ({ question }) => formatNumber(question.detector.efficiency), align: 'right' },
      { title: 'asked', value: ({ ordinal }) => (ordinal < record.questions.length ? 'swept' : 'followed up') },
    ],
  );
  return [pairs, questions, ...(progress.failures.length === 0 ? [] : [failureTable(progress.failures)])].join('\n\n');
}

const resolution = (value: 'auto' | number): string => (value === 'auto' ? value : formatNumber(value));

export function statusCommand(program: Command, io: Io): void {
  const command = verb(program, 'status', 'sweeps in the store; with a name, its questions and failures').argument(
    '[name]',
    'name of a sweep',
  );
  command.option('--workers', 'the workers of the cluster instead').option('--follow', 'stay and show progress until the sweep ends');
  storeOption(command).action(
    runVerb<[string | undefined], Options>(io, {}, async (context, options, name) => {
      if (options.workers === true) return showWorkers(context);
      const store = await openStore(context);
      if (name === undefined) {
        const entries: Entry[] = [];
        for (const record of await store.listSweeps()) entries.push(await entryOf(store, record));
        await printList(context, entries);
        return EXIT.done;
      }
      if (options.follow === true) await followSweep(context, store, name);
      const entry = await entryOf(store, await findStoredSweep(store, name));
      await print(context, {
        table: () => detailText(entry),
        json: () => ({
          ...rowOf(entry),
          questions: entry.record.questions as unknown as Json,
          follow_ups: entry.record.followUps as unknown as Json,
          failures: entry.progress.failures as unknown as Json,
        }),
        csv: () => ({ columns: COLUMNS, rows: [rowOf(entry)] }),
      });
      return EXIT.done;
    }),
  );
}
