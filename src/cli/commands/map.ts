/** `windrow map NAME`: one quantity over two axes of a sweep. */
import type { Command } from 'commander';
import { mapAxes } from '../../analysis/map-axes.js';
import { findQuantity } from '../../analysis/quantities.js';
import { boundaryChoice, boundaryOptions, type BoundaryOptions } from '../boundary-options.js';
import { openStore } from '../compose.js';
import { type Io, say } from '../context.js';
import { followedQuestions, type FollowUpOptions, followUpOptions } from '../follow-up-options.js';
import { mapDocument, mapRows, mapText, readMapView, writeMapFigures } from '../map-view.js';
import { averageOption, type AverageOption, collect, parsePlace, storeOption, verb } from '../options.js';
import { print } from '../print.js';
import { runVerb } from '../run-verb.js';
import { readStoredSweep, withAverage } from '../stored-sweep.js';

interface MapOptions extends BoundaryOptions, FollowUpOptions, AverageOption {
  readonly field: string;
  readonly x?: string;
  readonly y?: string;
  readonly at?: string[];
  readonly figures?: string;
}

function pick({ x, y }: MapOptions): { x?: string; y?: string } {
  return { ...(x === undefined ? {} : { x }), ...(y === undefined ? {} : { y }) };
}

export function mapCommand(program: Command, io: Io): void {
  const command = verb(program, 'map', 'one quantity over size and coupling, or any two axes')
    .argument('<name>', 'name of the sweep')
    .option('--field <name>', 'a numeric field of the results or an order parameter', 'winding_number')
    .option('--x <axis>', 'axis to the right; the coupling where it varies')
    .option('--y <axis>', 'axis upwards; the size where it varies')
    .option('--question <numbers>', 'only these questions, such as 0,2')
    .option('--at <axis=value>', 'only this value of an axis; may be repeated', collect)
    .option('--figures <folder>', 'also write the phase diagrams there, as SVG and PNG');
  storeOption(averageOption(followUpOptions(boundaryOptions(command)))).action(
    runVerb<[string], MapOptions>(io, {}, async (context, options, name) => {
      const quantity = findQuantity(options.field);
      const choice = boundaryChoice(options);
      const at = parsePlace('--at', options.at);
      const store = await openStore(context);
      const sweep = withAverage(await readStoredSweep(store, name), options.average);
      const { questions, status } = await followedQuestions(context, store, sweep, options, at);
      const chosen = mapAxes(sweep.grid.axes, Object.keys(at));
      const view = await readMapView(
        store,
        sweep,
        quantity,
        choice,
        { ...chosen, ...pick(options) },
        { questions, at, average: options.average },
      );
      await print(context, {
        table: () => mapText(view, context),
        json: () => mapDocument(view),
        csv: () => mapRows(view),
      });
      if (options.figures !== undefined) {
        for (const path of await writeMapFigures(view, options.figures)) say(context, `wrote ${path}`);
      }
      return status;
    }),
  );
}
