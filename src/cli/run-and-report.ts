/** What `sweep` and `resume` share: the run with its progress, the summary, and the report after it. */
import { mapAxes } from '../analysis/map-axes.js';
import { findQuantity } from '../analysis/quantities.js';
import type { SweepRun, SweepSummary } from '../coordinator/types.js';
import type { Json } from '../core/json.js';
import { formatCount, formatSeconds } from '../report/format.js';
import { renderPairs, renderTable } from '../report/table.js';
import type { ResultStore } from '../store/types.js';
import { type BoundaryChoice, boundaryChoice, boundaryOverview, boundaryRow } from './boundary-options.js';
import { memoryLimit, openWorkers, storeText } from './compose.js';
import { type Context, EXIT, type ExitStatus, say } from './context.js';
import { type MapView, mapText, readMapView, writeMapFigures } from './map-view.js';
import { print } from './print.js';
import { progressView } from './progress.js';
import { refinementOf, refinementText } from './refine.js';
import { readStoredSweep } from './stored-sweep.js';

/** Maps that the report puts on the terminal; schedules often differ little there, and the figures have all panels. */
const SHOWN_MAPS = 1;

export interface RunOptions {
  readonly retryFailed?: boolean;
  /** Folder for figures; with it the maps and boundaries are shown too. */
  readonly report?: string;
}

interface Report {
  readonly view: MapView;
  readonly figures: readonly string[];
}

export async function runWith(
  context: Context,
  store: ResultStore,
  options: RunOptions,
  run: (settings: Omit<SweepRun, 'grid' | 'document'>) => Promise<SweepSummary>,
): Promise<SweepSummary> {
  const workers = await openWorkers(context);
  const progress = progressView(context);
  // Also when the process is to end at once: a bar hides the cursor.
  context.closers.push(() => {
    progress.close();
    return Promise.resolve();
  });
  return run({
    store,
    ...workers,
    memory: memoryLimit(context.settings),
    signal: context.signal,
    onProgress: (status) => progress.show(status),
    ...(options.retryFailed === undefined ? {} : { retryFailed: options.retryFailed }),
  }).finally(() => progress.close());
}

function rate({ computed, seconds }: SweepSummary): number {
  return seconds > 0 ? computed / seconds : 0;
}

function headline(context: Context, { sweep, outcome, cells, computed, reused, failed }: SweepSummary): string {
  if (outcome === 'interrupted' && context.settings.redis !== null) {
    return `Sweep ${sweep} goes on without this process; \`windrow status ${sweep}\` follows it, \`windrow stop ${sweep}\` ends it.`;
  }
  if (outcome !== 'done') {
    const words = outcome === 'interrupted' ? 'was interrupted' : 'was stopped';
    return `Sweep ${sweep} ${words}; \`windrow resume ${sweep}\` computes what is missing.`;
  }
  if (computed === 0 && reused === cells) return `Sweep ${sweep}: every cell was in the store already; nothing was computed.`;
  if (failed > 0) return `Sweep ${sweep} is finished, with failed points; \`windrow resume ${sweep} --retry-failed\` tries them again.`;
  return `Sweep ${sweep} is finished.`;
}

function summaryText(context: Context, summary: SweepSummary): string {
  const { points, cells, computed, reused, failed, seconds, failures } = summary;
  const pairs = renderPairs([
    ['points', formatCount(points)],
    ['cells', formatCount(cells)],
    ['computed', formatCount(computed)],
    ['reused', formatCount(reused)],
    ['failed', `${formatCount(failed)}${failed === 1 ? ' point' : failed > 1 ? ' points' : ''}`],
    ['speed', computed === 0 ? '–' : `${formatCount(rate(summary))} cells/s`],
    ['time', formatSeconds(seconds)],
    ['results', `in ${storeText(context.settings)}`],
  ]);
  return failures.length === 0
    ? `${headline(context, summary)}\n${pairs}`
    : `${headline(context, summary)}\n${pairs}\n\n${failureTable(failures)}`;
}

export function failureTable(failures: SweepSummary['failures']): string {
  return renderTable(failures, [
    { title: 'failed', value: ({ count }) => formatCount(count), align: 'right' },
    { title: 'code', value: ({ code }) => code },
    { title: 'reason', value: ({ message }) => message },
  ]);
}

async function reportText(context: Context, { view, figures }: Report, folder: string): Promise<string> {
  const shown = view.maps.slice(0, SHOWN_MAPS);
  const rest = view.maps.length - shown.length;
  const name = view.sweep.grid.name;
  return [
    await mapText({ ...view, maps: shown }, context),
    ...(rest > 0 ? [`The other ${rest} in the figures, and by \`windrow map ${name}\`.`] : []),
    ...(view.boundaries.length === 0
      ? []
      : [`Boundary along ${view.sweep.labels.axisTitle(view.axes.x)}; ${view.choice.words}\n\n${boundaryOverview(view.boundaries)}`]),
    `Figures in ${folder}:\n${figures.map((path) => `  ${path}`).join('\n')}`,
  ].join('\n\n');
}

async function makeReport(store: ResultStore, name: string, folder: string): Promise<Report> {
  const sweep = await readStoredSweep(store, name);
  const choice = boundaryChoice({});
  const axes = mapAxes(sweep.grid.axes);
  const views: MapView[] = [];
  const figures: string[] = [];
  for (const field of ['winding_number', 'capped_mean']) {
    const view = await readMapView(store, sweep, findQuantity(field), choice, axes, {});
    views.push(view);
    figures.push(...(await writeMapFigures(view, folder)));
  }
  return { view: views[0], figures };
}

function statusOf({ outcome, failed }: SweepSummary): ExitStatus {
  if (outcome !== 'done') return EXIT.interrupted;
  return failed > 0 ? EXIT.failedPoints : EXIT.done;
}

const SUMMARY_COLUMNS = ['sweep', 'outcome', 'points', 'cells', 'computed', 'reused', 'failed', 'seconds', 'cells_per_second'] as const;

/** Prints the summary and, where asked, what a refinement took and the report; returns the exit status. */
export async function finish(
  context: Context,
  store: ResultStore,
  summary: SweepSummary,
  { report }: RunOptions,
  refined: { readonly choice: BoundaryChoice; readonly width: number } | null = null,
): Promise<ExitStatus> {
  const { shares, failures, ...counts } = summary;
  const flat = { ...counts, cells_per_second: rate(summary) };
  context.log.info({ sweep: summary.sweep, outcome: summary.outcome, shares }, 'sweep ended');
  if (report !== undefined && summary.outcome === 'done') say(context, `windrow: drawing figures into ${report}`);
  const made = report === undefined || summary.outcome !== 'done' ? null : await makeReport(store, summary.sweep, report);
  const refinement =
    refined === null || summary.outcome !== 'done' ? null : await refinementOf(store, summary.sweep, refined.choice, refined.width);
  await print(context, {
    table: async () =>
      [
        summaryText(context, summary),
        ...(refined && refinement ? [refinementText(refinement, refined.choice)] : []),
        ...(made && report !== undefined ? [await reportText(context, made, report)] : []),
      ].join('\n\n'),
    json: () => ({
      ...flat,
      failures: failures as Json,
      ...(refinement ? { refinement: { ...refinement } } : {}),
      ...(made ? { boundaries: made.view.boundaries.map(boundaryRow), figures: made.figures } : {}),
    }),
    csv: () => ({ columns: SUMMARY_COLUMNS, rows: [flat] }),
  });
  return statusOf(summary);
}
