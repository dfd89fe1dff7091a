/** `windrow boundary NAME`: the coupling at which an order parameter changes, as a bracket for each size and question. */
import type { Command } from 'commander';
import { requireAxis } from '../../analysis/curves.js';
import { mapAxes } from '../../analysis/map-axes.js';
import {
  BOUNDARY_COLUMNS,
  boundariesOf,
  boundaryChoice,
  boundaryOptions,
  type BoundaryOptions,
  boundaryRow,
  boundaryTable,
} from '../boundary-options.js';
import { openStore } from '../compose.js';
import type { Io } from '../context.js';
import { followedQuestions, type FollowUpOptions, followUpOptions } from '../follow-up-options.js';
import { averageOption, type AverageOption, collect, parsePlace, storeOption, verb } from '../options.js';
import { print } from '../print.js';
import { runVerb } from '../run-verb.js';
import { readSamples, readStoredSweep, REFINED_AXIS } from '../stored-sweep.js';

interface Options extends BoundaryOptions, FollowUpOptions, AverageOption {
  readonly along?: string;
  readonly at?: string[];
}

export function boundaryCommand(program: Command, io: Io): void {
  const command = verb(program, 'boundary', 'where an order parameter crosses a level or changes most steeply, as brackets')
    .argument('<name>', 'name of the sweep')
    .option('--along <axis>', 'numeric axis to search along; the coupling where it varies')
    .option('--question <numbers>', 'only these questions, such as 0,2')
    .option('--at <axis=value>', 'only this value of an axis; may be repeated', collect);
  storeOption(averageOption(followUpOptions(boundaryOptions(command)))).action(
    runVerb<[string], Options>(io, {}, async (context, options, name) => {
      const choice = boundaryChoice(options);
      const at = parsePlace('--at', options.at);
      const store = await openStore(context);
      const sweep = await readStoredSweep(store, name);
      const { questions, status } = await followedQuestions(context, store, sweep, options, at);
      const along = options.along ?? mapAxes(sweep.grid.axes, Object.keys(at)).x;
      const samples = await readSamples(store, sweep, choice.quantity, {
        questions,
        at,
        average: options.average,
        refined: along === REFINED_AXIS,
      });
      requireAxis(samples, along);
      const boundaries = boundariesOf(samples, choice, along);
      await print(context, {
        table: () => `Boundary of ${name} along ${sweep.labels.axisTitle(along)}; ${choice.words}\n\n${boundaryTable(boundaries)}`,
        json: () => boundaries.map(boundaryRow),
        csv: () => ({ columns: BOUNDARY_COLUMNS, rows: boundaries.map(boundaryRow) }),
      });
      return status;
    }),
  );
}
