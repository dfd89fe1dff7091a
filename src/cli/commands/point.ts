/** `windrow point`: one point computed here and now, without a store. */
import type { Command } from 'commander';
import { WindrowError } from '../../core/errors.js';
import type { Json } from '../../core/json.js';
import { flatRecord, RECORD_KEYS } from '../../report/flat-record.js';
import { formatNumber, stateText } from '../../report/format.js';
import { questionTitles } from '../../report/labels.js';
import { renderPairs, renderTable } from '../../report/table.js';
import { writeJsonLines } from '../../report/export.js';
import type { CellRow } from '../../store/types.js';
import { evaluatePoint } from '../../sweep/evaluate.js';
import { CELL_FIELDS, POINT_FIELDS } from '../../sweep/fields.js';
import { expandGrid } from '../../sweep/grid.js';
import { documentFromJson } from '../../sweep/read.js';
import type { Grid } from '../../sweep/types.js';
import { memoryLimit } from '../compose.js';
import { EXIT, type ExitStatus, type Io } from '../context.js';
import { collect, computeOptions, verb } from '../options.js';
import { pointDocument, type PointOptions } from '../point-document.js';
import { print } from '../print.js';
import { runVerb } from '../run-verb.js';

/** @throws WindrowError `cli.usage` where an axis is left open */
function onlyPoint(grid: Grid): void {
  if (grid.points === 1) return;
  const open = grid.axes.filter(({ values }) => values.length > 1).map(({ name, values }) => `${name} (${values.length} values)`);
  throw new WindrowError('cli.usage', 'the file spans more than one point', {
    where: '--set',
    found: `${grid.points} points`,
    allowed: `one value for each of ${open.join(', ')}`,
  });
}

function rowsOf(grid: Grid, memory: number): CellRow[] {
  const { id, spec, coordinates, ordinal } = grid.pointAt(0);
  const { point, cells, failure } = evaluatePoint({ id, spec, stored: null, questions: grid.questions }, { memory });
  return grid.questions.map(({ id: questionId, question, ordinal: questionOrdinal }) => {
    const cell = cells.find((candidate) => candidate.questionId === questionId);
    return {
      ordinal,
      coordinates,
      pointId: id,
      cellId: cell?.id ?? null,
      spec,
      question,
      questionOrdinal,
      point: point?.measured.fields ?? null,
      fields: cell?.fields ?? null,
      failure: cell ? null : failure && { code: failure.code, message: failure.message },
    };
  });
}

function shown(value: number | string | readonly string[] | null | undefined): string {
  return typeof value === 'number' ? formatNumber(value, 12) : value === null || value === undefined ? '–' : value.toString();
}

function pointText(rows: readonly CellRow[]): string {
  const [first] = rows as readonly [CellRow, ...CellRow[]];
  const { spec, point } = first;
  const flags = rows.flatMap((row) => [...(row.point?.flag_reasons ?? []), ...(row.fields?.flag_reasons ?? [])]);
  const head = renderPairs([
    ['model', spec.model],
    ['size', String(spec.size)],
    ['coupling', formatNumber(spec.coupling, 12)],
    ['parameters', JSON.stringify(spec.parameters)],
    ...(spec.disorder ? [['disorder', JSON.stringify(spec.disorder)] as const] : []),
    ['prepared', stateText(spec.prepared)],
    ['detected', spec.detected === 'same' ? 'the same' : stateText(spec.detected)],
  ]);
  const measured = renderTable(POINT_FIELDS, [
    { title: 'spectral measure', value: ({ name }) => name },
    { title: 'value', value: ({ name }) => shown(point?.[name]), align: 'right' },
    { title: 'unit', value: ({ unit }) => (unit === '1' ? '' : unit) },
  ]);
  const titles = questionTitles(rows.map(({ question }) => question));
  const budgets = new Set(rows.map(({ question }) => question.budget));
  const answered = renderTable(CELL_FIELDS, [
    { title: 'under a schedule', value: ({ name }) => name },
    ...rows.map((row, index) => ({
      title: `${titles[index] ?? ''}${budgets.size > 1 ? '' : `; K ${row.question.budget}`}`,
      value: ({ name }: (typeof CELL_FIELDS)[number]) => shown(row.fields?.[name]),
      align: 'right' as const,
    })),
    { title: 'unit', value: ({ unit }) => (unit === '1' ? '' : unit) },
  ]);
  const failures = rows.flatMap(({ failure }) => (failure ? [`Failed: ${failure.message} (${failure.code})`] : []));
  return [head, measured, answered, ...new Set(flags.map((reason) => `Note: ${reason}`)), ...new Set(failures)].join('\n\n');
}

function statusOf(rows: readonly CellRow[]): ExitStatus {
  return rows.some(({ failure }) => failure !== null) ? EXIT.failedPoints : EXIT.done;
}

export function pointCommand(program: Command, io: Io): void {
  const command = verb(program, 'point', 'compute one point without a store, from a sweep file or from options')
    .argument('[file]', 'sweep file that gives what --set does not')
    .option('--model <name>', 'model family, where there is no file')
    .option(
      '--set <key=value>',
      'a key of the sweep file or a parameter of the model, such as size=12, as=interaction-ratio, tilt=0.1',
      collect,
    )
    .option('--certify', 'count the accessible dimension exactly, by modular arithmetic');
  computeOptions(command).action(
    runVerb<[string | undefined], PointOptions>(io, {}, async (context, options, file) => {
      const grid = expandGrid(documentFromJson(pointDocument(file, options) as Json));
      onlyPoint(grid);
      const rows = rowsOf(grid, memoryLimit(context.settings));
      const records = rows.map((row) => flatRecord(row, null));
      if (context.format === 'json') await writeJsonLines(records, context.out);
      else
        await print(context, { table: () => pointText(rows), json: () => records, csv: () => ({ columns: RECORD_KEYS, rows: records }) });
      return statusOf(rows);
    }),
  );
}
