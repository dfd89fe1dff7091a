/** `windrow cut NAME`: one quantity along one axis, at chosen values of others. */
import type { Command } from 'commander';
import { type Curve, curvesOf } from '../../analysis/curves.js';
import { mapAxes } from '../../analysis/map-axes.js';
import { findQuantity, type Quantity } from '../../analysis/quantities.js';
import type { Json } from '../../core/json.js';
import { cutFigureSpec } from '../../report/cut-figure.js';
import { coordinatesText, formatNumber, scheduleText } from '../../report/format.js';
import { quantityTitle, resolutionText } from '../../report/labels.js';
import { renderTable } from '../../report/table.js';
import { openStore } from '../compose.js';
import { type Io, say } from '../context.js';
import { followedQuestions, type FollowUpOptions, followUpOptions } from '../follow-up-options.js';
import { averageOption, type AverageOption, collect, parsePlace, storeOption, verb } from '../options.js';
import { print } from '../print.js';
import { runVerb } from '../run-verb.js';
import { readSamples, readStoredSweep, withAverage } from '../stored-sweep.js';

interface Options extends FollowUpOptions, AverageOption {
  readonly field: string;
  readonly along?: string;
  readonly at?: string[];
  readonly figures?: string;
}

const SIGNS = { value: '', doubtful: ' ~', 'undefined-value': '', failed: 'failed', missing: '?' } as const;

/** One row a point, so that any number of curves fits. */
function cutRows(curves: readonly Curve[], along: string, quantity: Quantity): { columns: string[]; rows: { [column: string]: Json }[] } {
  const axes = Object.keys(curves[0]?.at ?? {});
  const rows = curves.flatMap(({ questionOrdinal, question, at, points }) =>
    points.map(({ x, value, error, count, state }) => ({
      question: questionOrdinal,
      schedule: question.schedule,
      budget: question.budget,
      efficiency: question.detector.efficiency,
      ...at,
      [along]: x,
      [quantity.name]: value,
      error,
      count,
      state,
    })),
  );
  return { columns: ['question', 'schedule', 'budget', 'efficiency', ...axes, along, quantity.name, 'error', 'count', 'state'], rows };
}

function cutText(curves: readonly Curve[], along: string, quantity: Quantity): string {
  return curves
    .map(({ question, at, points, resolution }) => {
      const place = coordinatesText(at);
      const head = `${quantityTitle(quantity)} · ${scheduleText(question.schedule)}; ${resolutionText(question, resolution)}${place === '' ? '' : ` · ${place}`}`;
      const table = renderTable(points, [
        { title: along, value: ({ x }) => (typeof x === 'number' ? formatNumber(x, 6) : x), align: 'right' },
        {
          title: quantity.name,
          value: ({ value, state }) => `${value === null ? '' : formatNumber(value, 6)}${SIGNS[state]}` || '–',
          align: 'right',
        },
        ...(points.some(({ error }) => error !== null)
          ? [{ title: '±', value: ({ error }: { error: number | null }) => formatNumber(error, 2), align: 'right' as const }]
          : []),
      ]);
      return `${head}\n${table}`;
    })
    .join('\n\n');
}

export function cutCommand(program: Command, io: Io): void {
  const command = verb(program, 'cut', 'one quantity along one axis')
    .argument('<name>', 'name of the sweep')
    .option('--field <name>', 'a numeric field of the results or an order parameter', 'winding_number')
    .option('--along <axis>', 'axis of the cut; the coupling, or the next axis that varies where --at fixes it')
    .option('--at <axis=value>', 'only this value of another axis, such as size=12; may be repeated', collect)
    .option('--question <numbers>', 'only these questions, such as 0,2')
    .option('--figures <folder>', 'also write the figure there, as SVG and PNG');
  storeOption(averageOption(followUpOptions(command))).action(
    runVerb<[string], Options>(io, {}, async (context, options, name) => {
      const quantity = findQuantity(options.field);
      const at = parsePlace('--at', options.at);
      const store = await openStore(context);
      const sweep = withAverage(await readStoredSweep(store, name), options.average);
      const along = options.along ?? mapAxes(sweep.grid.axes, Object.keys(at)).x;
      const { questions, status } = await followedQuestions(context, store, sweep, options, at);
      const curves = curvesOf(await readSamples(store, sweep, quantity, { questions, at, average: options.average }), along);
      await print(context, {
        table: () => cutText(curves, along, quantity),
        json: () => cutRows(curves, along, quantity).rows,
        csv: () => cutRows(curves, along, quantity),
      });
      if (options.figures !== undefined) {
        const { writeFigure } = await import('../../report/render-figure.js');
        const spec = cutFigureSpec({ curves, along, quantity, labels: sweep.labels, notes: sweep.notes });
        const file = `cut-${quantity.name.replaceAll('_', '-')}`;
        for (const path of await writeFigure(spec, options.figures, file)) say(context, `wrote ${path}`);
      }
      return status;
    }),
  );
}
