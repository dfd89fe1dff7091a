/** `windrow trace NAME|FILE`: the time series of one point. */
import type { Command } from 'commander';
import { Option } from 'commander';
import { WindrowError } from '../../core/errors.js';
import type { Json } from '../../core/json.js';
import { coordinatesText, formatNumber, scheduleText, stateText } from '../../report/format.js';
import { renderPairs, renderTable } from '../../report/table.js';
import type { MeasuredPoint } from '../../spectral/types.js';
import { type Trace, traceMeasure } from '../../statistics/trace.js';
import { evaluatePoint } from '../../sweep/evaluate.js';
import type { GridPoint, QuestionRecord } from '../../sweep/types.js';
import { memoryLimit, openStore } from '../compose.js';
import { type Context, EXIT, type Io, say } from '../context.js';
import { type FollowUpOptions, followUpOptions } from '../follow-up-options.js';
import { collect, parseNumber, storeOption, verb } from '../options.js';
import { print } from '../print.js';
import { runVerb } from '../run-verb.js';
import { type TracePlace, tracePlace } from '../trace-place.js';

const PARTS = ['series', 'phase', 'correlations'] as const;

interface Options extends FollowUpOptions {
  readonly set?: string[];
  readonly length?: string;
  readonly correlations?: string;
  readonly seed?: string;
  readonly draw?: string;
  readonly part: (typeof PARTS)[number];
  readonly figures?: string;
}

interface Entry {
  readonly record: QuestionRecord;
  readonly trace: Trace;
}

const LENGTH = { standard: 100, most: 1_000_000 } as const;
const CORRELATIONS = { standard: 12, most: 1000 } as const;

function count(option: string, text: string | undefined, least: number, most: number, standard: number): number {
  if (text === undefined) return standard;
  const allowed = `a whole number from ${least} to ${most}`;
  return parseNumber(option, text, allowed, (value) => Number.isInteger(value) && value >= least && value <= most);
}

/** From the store where it is there, else computed. @throws WindrowError the failure of a point that cannot be computed */
async function measureOf(context: Context, { store, point }: TracePlace): Promise<MeasuredPoint> {
  const stored = store === null ? undefined : (await store.measures([point.id])).get(point.id);
  if (stored !== undefined) {
    say(context, 'windrow: the measure of this point is in the store; nothing was diagonalised');
    return stored;
  }
  if (store !== null) say(context, 'windrow: this point is not in the store; its measure is computed here');
  const task = { id: point.id, spec: point.spec, stored: null, questions: [] };
  const { point: computed, failure } = evaluatePoint(task, { memory: memoryLimit(context.settings) });
  if (computed === null) throw new WindrowError(failure?.code ?? 'internal.invariant', failure?.message ?? 'a point without a measure');
  return computed.measured;
}

type Rows = { readonly columns: readonly string[]; readonly rows: readonly { readonly [column: string]: number }[] };

function rowsOf(entries: readonly Entry[], part: Options['part']): Rows {
  const of = (columns: readonly string[], rows: (trace: Trace) => { [column: string]: number }[]): Rows => ({
    columns: ['question', ...columns],
    rows: entries.flatMap(({ record, trace }) => rows(trace).map((row) => ({ question: record.ordinal, ...row }))),
  });
  if (part === 'series') {
    return of(['n', 'time', 'detection', 'survival', 'transition', 'recurrent_weight'], (trace) =>
      Array.from(trace.time, (time, n) => ({
        n,
        time,
        detection: trace.detection[n],
        survival: trace.survival[n],
        transition: trace.transition[n],
        recurrent_weight: trace.recurrentWeight,
      })),
    );
  }
  if (part === 'phase') {
    return of(['angle', 'phase'], ({ phase }) => Array.from(phase.angle, (angle, m) => ({ angle, phase: phase.phase[m] })));
  }
  return of(['k', 'l', 're', 'im'], ({ correlation: { size, re, im } }) =>
    Array.from(re, (value, at) => ({ k: Math.floor(at / size), l: at % size, re: value, im: im[at] })),
  );
}

function pointText({ spec, coordinates }: GridPoint): string {
  const states = spec.detected === 'same' ? stateText(spec.prepared) : `${stateText(spec.prepared)} to ${stateText(spec.detected)}`;
  return `${spec.model}, ${coordinatesText(coordinates)}, ${states}`;
}

const PHASE_OF = {
  exact: 'of all measurements, exact',
  budget: 'of the measurements in the budget',
  draw: 'of one drawn sequence of intervals',
} as const;

function entryText({ record: { question }, trace }: Entry, part: Options['part']): string {
  const { phase } = trace;
  const head = renderPairs([
    ['schedule', scheduleText(question.schedule)],
    ['budget', String(question.budget)],
    ['recurrent weight', formatNumber(trace.recurrentWeight, 6)],
    ['winding of the phase', `${phase.winding ?? 'not defined'} (${PHASE_OF[phase.of]})`],
  ]);
  const { columns, rows } = rowsOf([{ record: { id: '', ordinal: 0, question }, trace }], part);
  const shown = columns.filter((column) => column !== 'question' && column !== 'recurrent_weight');
  const table = renderTable(
    rows,
    shown.map((title) => ({ title, value: (row: Rows['rows'][number]) => formatNumber(row[title], 6), align: 'right' as const })),
  );
  return `${head}\n\n${table}`;
}

const numbers = (values: Float64Array): Json => Array.from(values, (value) => (Number.isFinite(value) ? value : null));

function entryDocument({ record, trace }: Entry, { id, spec, coordinates }: GridPoint): Json {
  const { time, detection, survival, transition, phase, correlation, resolution } = trace;
  const row = (values: Float64Array, k: number): Json => numbers(values.subarray(k * correlation.size, (k + 1) * correlation.size));
  const matrix = (values: Float64Array): Json => Array.from({ length: correlation.size }, (_, k) => row(values, k));
  return {
    point_id: id,
    spec: spec as unknown as Json,
    coordinates,
    question_id: record.id,
    question: record.question as unknown as Json,
    resolution_energy: resolution.energy,
    resolution_weight: resolution.weight,
    recurrent_weight: trace.recurrentWeight,
    series: {
      time: numbers(time),
      detection: numbers(detection),
      survival: numbers(survival),
      transition: numbers(transition),
    },
    phase: { of: phase.of, winding: phase.winding, angle: numbers(phase.angle), phase: numbers(phase.phase) },
    correlations: { re: matrix(correlation.re), im: matrix(correlation.im) },
  };
}

async function writeFigures(context: Context, { point }: TracePlace, entries: readonly Entry[], folder: string): Promise<void> {
  const [{ writeFigure }, { traceFigureSpec }] = await Promise.all([
    import('../../report/render-figure.js'),
    import('../../report/trace-figure.js'),
  ]);
  for (const [index, { record, trace }] of entries.entries()) {
    const spec = traceFigureSpec({ trace, question: record.question, title: pointText(point), notes: [] });
    const name = entries.length === 1 ? 'trace' : `trace-${index + 1}`;
    for (const path of await writeFigure(spec, folder, name)) say(context, `wrote ${path}`);
  }
}

export function traceCommand(program: Command, io: Io): void {
  const command = verb(program, 'trace', 'time series of one point: detection, survival, transition, winding phase, correlations')
    .argument('<name or file>', 'a sweep in the store, or a sweep file')
    .option('--set <key=value>', 'the value on an axis, or a change of the sweep, such as size=12; may be repeated', collect)
    .option('--question <numbers>', 'only these questions, such as 0,2')
    .option('--length <count>', 'number of measurements followed; default the budget, 100 at most')
    .option('--correlations <count>', 'rows of the time-correlation matrix; default the budget, 12 at most')
    .option('--seed <number>', 'seed of the drawn intervals whose winding phase is shown; default that of the sampling, or 0')
    .option('--draw <number>', 'number of the draw', '0')
    .addOption(new Option('--part <part>', 'what tables and CSV show; JSON has all').choices([...PARTS]).default('series'))
    .option('--figures <folder>', 'also write the figure there, as SVG and PNG');
  storeOption(followUpOptions(command)).action(
    runVerb<[string], Options>(io, {}, async (context, options, source) => {
      const place = await tracePlace(source, options, () => openStore(context));
      const draw = count('--draw', options.draw, 0, Number.MAX_SAFE_INTEGER, 0);
      const measured = await measureOf(context, place);
      const entries = place.questions.map((record) => {
        const { budget, sampling } = record.question;
        const length = count('--length', options.length, 1, LENGTH.most, Math.min(budget, LENGTH.standard));
        const correlations = count('--correlations', options.correlations, 1, CORRELATIONS.most, Math.min(budget, CORRELATIONS.standard));
        const seed = count('--seed', options.seed, 0, Number.MAX_SAFE_INTEGER, sampling?.seed ?? 0);
        return { record, trace: traceMeasure(measured, record.question, { length, correlations, draw: { seed, number: draw } }) };
      });
      await print(context, {
        table: () => [pointText(place.point), ...entries.map((entry) => entryText(entry, options.part))].join('\n\n'),
        json: () => entries.map((entry) => entryDocument(entry, place.point)),
        csv: () => rowsOf(entries, options.part),
      });
      if (options.figures !== undefined) await writeFigures(context, place, entries, options.figures);
      return EXIT.done;
    }),
  );
}
