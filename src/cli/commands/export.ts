/** `windrow export NAME`: every cell of a sweep as one flat row, in full precision, streamed. */
import { createWriteStream } from 'node:fs';
import type { Writable } from 'node:stream';
import type { Command } from 'commander';
import { WindrowError } from '../../core/errors.js';
import type { Json } from '../../core/json.js';
import { csvText, writeCsv, writeJsonLines } from '../../report/export.js';
import { type FlatRecord, flatRecord, RECORD_KEYS } from '../../report/flat-record.js';
import { formatNumber } from '../../report/format.js';
import { renderTable } from '../../report/table.js';
import type { CellRow } from '../../store/types.js';
import { openStore } from '../compose.js';
import { type Format, type Io, say } from '../context.js';
import { followedQuestions, type FollowUpOptions, followUpOptions } from '../follow-up-options.js';
import { storeOption, verb } from '../options.js';
import { endOf, writeText } from '../print.js';
import { runVerb } from '../run-verb.js';
import { readStoredSweep } from '../stored-sweep.js';

interface Options extends FollowUpOptions {
  readonly output?: string;
}

async function* records(rows: AsyncIterable<CellRow>, sweep: string): AsyncIterable<FlatRecord> {
  for await (const row of rows) yield flatRecord(row, sweep);
}

/** Columns a person can read; the other formats have all. */
const SHOWN = [
  'size',
  'coupling',
  'question',
  'winding_number',
  'capped_mean',
  'mean_measurements',
  'recurrent_weight',
  'status',
  'flags',
] as const;

function shown(value: Json | undefined): string {
  if (typeof value === 'number') return formatNumber(value, 6);
  return Array.isArray(value) ? value.join(' ') : csvText(value) || '–';
}

async function write(format: Format, all: AsyncIterable<FlatRecord>, out: Writable): Promise<void> {
  if (format === 'csv') return writeCsv(all, RECORD_KEYS, out);
  if (format === 'json') return writeJsonLines(all, out);
  const rows: FlatRecord[] = [];
  for await (const record of all) rows.push(record);
  return writeText(
    out,
    `${renderTable(
      rows,
      SHOWN.map((key) => ({ title: key, value: (row: FlatRecord) => shown(row[key]) })),
    )}\n`,
  );
}

async function writeFileOf(path: string, work: (out: Writable) => Promise<void>): Promise<void> {
  const file = createWriteStream(path);
  try {
    await work(file);
    await endOf(file);
  } catch (cause) {
    if (cause instanceof WindrowError) throw cause;
    const found = cause instanceof Error ? cause.message : String(cause);
    throw new WindrowError('report.unwritable', 'an export cannot be written', {
      where: path,
      found,
      allowed: 'a file that can be written',
      cause,
    });
  }
}

export function exportCommand(program: Command, io: Io): void {
  const command = verb(program, 'export', 'every cell as a flat row: CSV (default) or JSON lines')
    .argument('<name>', 'name of the sweep')
    .option('--output <file>', 'write there instead of to stdout')
    .option('--question <numbers>', 'only these questions, such as 0,2');
  storeOption(followUpOptions(command)).action(
    runVerb<[string], Options>(io, { format: 'csv' }, async (context, options, name) => {
      const store = await openStore(context);
      const { questions, status } = await followedQuestions(context, store, await readStoredSweep(store, name), options);
      const rows = records(store.cells({ sweep: name, ...(questions === undefined ? {} : { questions }) }), name);
      if (options.output === undefined) await write(context.format, rows, context.out);
      else {
        await writeFileOf(options.output, (out) => write(context.format, rows, out));
        say(context, `wrote ${options.output}`);
      }
      return status;
    }),
  );
}
