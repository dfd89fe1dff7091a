/** `windrow sweep FILE`: computes every cell of a sweep file that the store does not hold yet. */
import type { Command } from 'commander';
import { WindrowError } from '../../core/errors.js';
import type { Json } from '../../core/json.js';
import { refineSweep } from '../../coordinator/refine-sweep.js';
import { openSweep, runSweep } from '../../coordinator/run-sweep.js';
import { formatBytes, formatCount, formatNumber, formatSeconds } from '../../report/format.js';
import { renderPairs } from '../../report/table.js';
import type { SweepDocument } from '../../sweep/document.js';
import { estimateSweep } from '../../sweep/estimate.js';
import { expandGrid } from '../../sweep/grid.js';
import { readSweepFile } from '../../sweep/read-file.js';
import type { Grid } from '../../sweep/types.js';
import { memoryLimit, openCluster, openStore, tellIfAlone, threadCount } from '../compose.js';
import { type Context, EXIT, type ExitStatus, type Io } from '../context.js';
import { boundaryChoice, boundaryOptions, type BoundaryOptions } from '../boundary-options.js';
import { refinementWidth, wantedPlaces } from '../refine.js';
import { computeOptions, storeOption, verb } from '../options.js';
import { print } from '../print.js';
import { runVerb } from '../run-verb.js';
import { finish, runWith } from '../run-and-report.js';

interface Options extends BoundaryOptions {
  readonly refine?: string;
  readonly estimate?: boolean;
  readonly report?: string;
  readonly allowLarge?: boolean;
  readonly certify?: boolean;
  readonly detach?: boolean;
}

async function printEstimate(context: Context, grid: Grid): Promise<void> {
  const threads = threadCount(context.settings);
  const estimate = estimateSweep(grid, { threads });
  const limit = memoryLimit(context.settings);
  const flat = {
    sweep: grid.name,
    points: estimate.points,
    questions: estimate.questions,
    cells: estimate.cells,
    largest_dimension: estimate.largestDimension,
    memory_per_worker: estimate.memory,
    memory_limit: limit,
    kernel_flops: estimate.flops.kernel,
    statistics_flops: estimate.flops.statistics,
    threads,
    seconds: estimate.seconds,
    sampled_points: estimate.sampled,
  };
  const axes = grid.axes.map(({ name, values, unit }) => {
    const count = `${formatCount(values.length)} ${values.length === 1 ? 'value' : 'values'}`;
    return [`axis ${name}`, unit === '' ? count : `${count} (${unit})`] as const;
  });
  await print(context, {
    table: () =>
      renderPairs([
        ['sweep', grid.name],
        ...axes,
        ['points', formatCount(estimate.points)],
        ['questions', formatCount(estimate.questions)],
        ['cells', formatCount(estimate.cells)],
        ['largest matrix', `${formatCount(estimate.largestDimension)} × ${formatCount(estimate.largestDimension)}`],
        ['memory per worker', `${formatBytes(estimate.memory)} of ${formatBytes(limit)} allowed`],
        [
          'work',
          `${formatNumber(estimate.flops.total, 3)} flop (spectral measures ${formatNumber(estimate.flops.kernel, 3)}, statistics ${formatNumber(estimate.flops.statistics, 3)})`,
        ],
        ['time', `about ${formatSeconds(estimate.seconds)} on ${threads} thread(s), an upper estimate with nothing stored`],
        ...(estimate.sampled < estimate.points ? [['estimated from', `${formatCount(estimate.sampled)} points`] as const] : []),
      ]),
    json: () => flat,
    csv: () => ({ columns: Object.keys(flat), rows: [flat] }),
  });
}

/** Leaves a sweep to the workers of the cluster. @throws settings.invalid without one */
async function detach(context: Context, grid: Grid, document: Json): Promise<ExitStatus> {
  await tellIfAlone(context, await openCluster(context));
  const store = await openStore(context);
  await openSweep({ grid, document, store });
  const row = { sweep: grid.name, points: grid.points, cells: grid.cells };
  await print(context, {
    table: () => `Sweep ${grid.name} is left to the workers; \`windrow status ${grid.name} --follow\` shows how it goes.`,
    json: () => row,
    csv: () => ({ columns: Object.keys(row), rows: [row] }),
  });
  return EXIT.done;
}

/** @throws WindrowError `cli.usage` */
function refinementAsked(options: Options) {
  if (options.refine === undefined) return null;
  if (options.detach === true)
    throw new WindrowError('cli.usage', 'a refinement needs the results of each round', {
      where: '--refine',
      found: 'with --detach',
      allowed: 'one of the two',
    });
  return { choice: boundaryChoice(options), width: refinementWidth(options.refine) };
}

export function sweepCommand(program: Command, io: Io): void {
  const command = verb(program, 'sweep', 'compute a sweep file; cells that are in the store already are reused')
    .argument('<file>', 'sweep file, YAML or JSON')
    .option('--estimate', 'print grid, memory and time without running')
    .option('--report <folder>', 'afterwards show phase diagram and boundary, and write figures there')
    .option('--certify', 'count accessible dimensions exactly, by modular arithmetic; the same as `certify: true` in the file')
    .option('--allow-large', 'accept a grid above two million cells')
    .option(
      '--refine <boundary:width>',
      'then halve the brackets of the boundary along the coupling by new points until they are this narrow',
    )
    .option('--detach', 'leave the sweep to the workers of a cluster and return at once');
  storeOption(computeOptions(boundaryOptions(command))).action(
    runVerb<[string], Options>(io, { drains: true }, async (context, options, file) => {
      const read = readSweepFile(file, { allowLarge: options.allowLarge === true });
      const document: SweepDocument = options.certify === true ? { ...read, certify: true } : read;
      const grid = expandGrid(document);
      const refined = refinementAsked(options);
      if (options.estimate === true) {
        await printEstimate(context, grid);
        return EXIT.done;
      }
      if (options.detach === true) return detach(context, grid, document as unknown as Json);
      const store = await openStore(context);
      const summary = await runWith(context, store, options, (settings) => {
        const run = { ...settings, grid, document: document as unknown as Json };
        if (refined === null) return runSweep(run);
        return refineSweep(run, () => wantedPlaces(store, grid.name, refined.choice, refined.width));
      });
      return finish(context, store, summary, options, refined);
    }),
  );
}
