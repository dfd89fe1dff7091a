/** `windrow export NAME`: every cell of a sweep as one flat row, in full precision, streamed; or as a file for other tools. */
import type { Writable } from 'node:stream';
import { type Command, Option } from 'commander';
import { WindrowError } from '../../core/errors.js';
import type { Json } from '../../core/json.js';
import { csvText, writeCsv, writeJsonLines } from '../../report/export.js';
import { type FlatRecord, RECORD_KEYS } from '../../report/flat-record.js';
import { formatNumber } from '../../report/format.js';
import { renderTable } from '../../report/table.js';
import { openStore } from '../compose.js';
import { type Format, type Io, say } from '../context.js';
import { followedQuestions, type FollowUpOptions, followUpOptions } from '../follow-up-options.js';
import { type FileKind, FILE_KINDS, METADATA_SUFFIX, records, writeExportFile, writeFileOf } from '../export-file.js';
import { storeOption, verb } from '../options.js';
import { writeText } from '../print.js';
import { runVerb } from '../run-verb.js';
import { findStoredSweep, readStoredSweep } from '../stored-sweep.js';

interface Options extends FollowUpOptions {
  readonly output?: string;
  readonly as?: FileKind;
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

/** @throws WindrowError `cli.usage` for a file without a place */
function requireOutput({ as, output }: Options): void {
  if (as === undefined || output !== undefined) return;
  throw new WindrowError('cli.usage', 'a file for other tools needs a name', {
    where: '--output',
    allowed: `--output FILE beside --as ${as}`,
  });
}

export function exportCommand(program: Command, io: Io): void {
  const command = verb(program, 'export', 'every cell as a flat row: CSV (default) or JSON lines; --as makes files for other tools')
    .argument('<name>', 'name of the sweep')
    .option('--output <file>', 'write there instead of to stdout')
    .addOption(
      new Option(
        '--as <kind>',
        `file for other tools, with units, questions and digests; npz has the spectral measures too, those of csv and jsonl stand in FILE${METADATA_SUFFIX}`,
      )
        .choices([...FILE_KINDS])
        .conflicts('format'),
    )
    .option('--question <numbers>', 'only these questions, such as 0,2');
  storeOption(followUpOptions(command)).action(
    runVerb<[string], Options>(io, { format: 'csv' }, async (context, options, name) => {
      requireOutput(options);
      const store = await openStore(context);
      const sweep = await readStoredSweep(store, name);
      const { questions, status } = await followedQuestions(context, store, sweep, options);
      const rows = store.cells({ sweep: name, ...(questions === undefined ? {} : { questions }) });
      const { as, output } = options;
      if (output === undefined) await write(context.format, records(rows, name), context.out);
      else if (as === undefined) {
        await writeFileOf(output, (out) => write(context.format, records(rows, name), out));
        say(context, `wrote ${output}`);
      } else {
        // Read again, since follow-ups may have been added.
        const source = { record: await findStoredSweep(store, name), grid: sweep.grid, questions };
        for (const file of await writeExportFile({ ...source, rows, measures: (ids) => store.measures(ids) }, as, output))
          say(context, `wrote ${file}`);
      }
      return status;
    }),
  );
}
