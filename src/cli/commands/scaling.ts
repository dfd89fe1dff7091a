/** `windrow scaling NAME`: the boundary of growing sizes drawn out to its limit, with exponent, errors and residuals. */
import type { Command } from 'commander';
import { requireAxis } from '../../analysis/curves.js';
import { type Estimated, type PlacedScaling, scalingsOf } from '../../analysis/scaling.js';
import { WindrowError } from '../../core/errors.js';
import type { Json } from '../../core/json.js';
import { coordinatesText, formatNumber, scheduleText } from '../../report/format.js';
import { renderTable } from '../../report/table.js';
import { boundariesOf, boundaryChoice, boundaryOptions, type BoundaryOptions } from '../boundary-options.js';
import { openStore } from '../compose.js';
import type { Io } from '../context.js';
import { followedQuestions, type FollowUpOptions, followUpOptions } from '../follow-up-options.js';
import { collect, parsePlace, storeOption, verb } from '../options.js';
import { print } from '../print.js';
import { runVerb } from '../run-verb.js';
import { readSamples, readStoredSweep, REFINED_AXIS } from '../stored-sweep.js';

interface Options extends BoundaryOptions, FollowUpOptions {
  readonly along: string;
  readonly at?: string[];
}

const COLUMNS = [
  'question',
  'schedule',
  'budget',
  'at',
  'outcome',
  'limit',
  'limit_error',
  'limit_bracket_error',
  'limit_without_smallest',
  'exponent',
  'exponent_error',
  'exponent_bracket_error',
  'amplitude',
  'scatter',
  'left_out',
  'words',
  'size',
  'low',
  'estimate',
  'high',
  'residual',
] as const;

type Row = { readonly [column in (typeof COLUMNS)[number]]: Json };

function summary(scaling: PlacedScaling) {
  const { fit } = scaling;
  return {
    question: scaling.questionOrdinal,
    schedule: scaling.question.schedule,
    budget: scaling.question.budget,
    at: scaling.at,
    outcome: scaling.outcome,
    limit: fit?.limit.value ?? null,
    limit_error: fit?.limit.error ?? null,
    limit_bracket_error: fit?.limit.bracket_error ?? null,
    limit_without_smallest: fit?.limit_without_smallest ?? null,
    exponent: fit?.exponent.value ?? null,
    exponent_error: fit?.exponent.error ?? null,
    exponent_bracket_error: fit?.exponent.bracket_error ?? null,
    amplitude: fit?.amplitude ?? null,
    scatter: fit?.scatter ?? null,
    left_out: scaling.left_out,
    words: scaling.words,
  };
}

function sizesOf({ sizes, fit }: PlacedScaling) {
  return sizes.map(({ size, low, estimate, high }, index) => ({ size, low, estimate, high, residual: fit?.residuals[index] ?? null }));
}

/** One row a size, the fit repeated in each; a place without any size keeps its row. */
function csvRows(scaling: PlacedScaling): Row[] {
  const none = { size: null, low: null, estimate: null, high: null, residual: null };
  const sizes = sizesOf(scaling);
  return (sizes.length === 0 ? [none] : sizes).map((size) => ({ ...summary(scaling), ...size }));
}

const estimatedText = ({ value, error, bracket_error }: Estimated): string =>
  `${formatNumber(value, 5)} ± ${formatNumber(error, 2)} (± ${formatNumber(bracket_error, 2)})`;

function summaryTable(scalings: readonly PlacedScaling[]): string {
  return renderTable(scalings, [
    { title: 'schedule', value: ({ question }) => scheduleText(question.schedule) },
    { title: 'at', value: ({ at }) => coordinatesText(at) },
    { title: 'limit b∞', value: ({ fit }) => (fit ? estimatedText(fit.limit) : '–') },
    { title: 'exponent ω', value: ({ fit }) => (fit ? estimatedText(fit.exponent) : '–') },
    { title: 'amplitude a', value: ({ fit }) => (fit ? formatNumber(fit.amplitude, 4) : '–'), align: 'right' },
    { title: 'scatter', value: ({ fit }) => (fit ? formatNumber(fit.scatter, 2) : '–'), align: 'right' },
    {
      title: 'without smallest',
      value: ({ fit }) => (fit?.limit_without_smallest == null ? '–' : formatNumber(fit.limit_without_smallest, 5)),
      align: 'right',
    },
    {
      title: 'remark',
      value: ({ outcome, words, left_out }) =>
        (outcome === 'fit' ? words : `${outcome}: ${words}`) + (left_out === 0 ? '' : `; ${left_out} without a bracket left out`),
    },
  ]);
}

function residualTable(scaling: PlacedScaling): string {
  const place = coordinatesText(scaling.at);
  const table = renderTable(sizesOf(scaling), [
    { title: 'size', value: ({ size }) => formatNumber(size), align: 'right' },
    { title: 'bracket', value: ({ low, high }) => `[${formatNumber(low, 6)}, ${formatNumber(high, 6)}]` },
    { title: 'boundary', value: ({ estimate }) => formatNumber(estimate, 6), align: 'right' },
    { title: 'residual', value: ({ residual }) => (residual === null ? '–' : formatNumber(residual, 2)), align: 'right' },
  ]);
  return `${[scheduleText(scaling.question.schedule), ...(place === '' ? [] : [place])].join(', ')}\n${table}`;
}

export function scalingCommand(program: Command, io: Io): void {
  const command = verb(
    program,
    'scaling',
    'where the boundary of growing sizes is drawn to: b(N) = b∞ + a·N^(−ω), with errors and residuals',
  )
    .argument('<name>', 'name of the sweep')
    .option('--along <axis>', 'numeric axis the boundary is searched along', 'coupling')
    .option('--question <numbers>', 'only these questions, such as 0,2')
    .option('--at <axis=value>', 'only this value of an axis; may be repeated', collect);
  storeOption(followUpOptions(boundaryOptions(command))).action(
    runVerb<[string], Options>(io, {}, async (context, options, name) => {
      const choice = boundaryChoice(options);
      const at = parsePlace('--at', options.at);
      const { along } = options;
      if (along === 'size')
        throw new WindrowError('cli.usage', 'sizes are what a boundary is followed over', {
          where: '--along',
          found: along,
          allowed: 'any other axis',
        });
      const store = await openStore(context);
      const sweep = await readStoredSweep(store, name);
      const { questions, status } = await followedQuestions(context, store, sweep, options, at);
      const samples = await readSamples(store, sweep, choice.quantity, { questions, at, refined: along === REFINED_AXIS });
      requireAxis(samples, along);
      const scalings = scalingsOf(boundariesOf(samples, choice, along));
      const caption =
        `Boundary of ${name} along ${sweep.labels.axisTitle(along)} over the size; ${choice.words}.\n` +
        'b(N) = b∞ + a·N^(−ω); ± scatter around the law (± boundaries anywhere in their brackets), one standard deviation.';
      await print(context, {
        table: () => [caption, summaryTable(scalings), ...scalings.filter(({ sizes }) => sizes.length > 0).map(residualTable)].join('\n\n'),
        json: () => scalings.map((scaling) => ({ ...summary(scaling), sizes: sizesOf(scaling) })),
        csv: () => ({ columns: COLUMNS, rows: scalings.flatMap(csvRows) }),
      });
      return status;
    }),
  );
}
