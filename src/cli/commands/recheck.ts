/** `windrow recheck NAME`: random points of a sweep computed again and compared with what is stored. */
import type { Command } from 'commander';
import type { Json } from '../../core/json.js';
import { recheck, type RecheckSummary } from '../../coordinator/recheck.js';
import { formatCount } from '../../report/format.js';
import { renderPairs } from '../../report/table.js';
import { COMPARISON_COLUMNS, comparisonRows, comparisonText, parseTolerance, STANDARD_TOLERANCE } from '../comparison-view.js';
import { memoryLimit, openPool, openStore } from '../compose.js';
import { EXIT, type ExitStatus, type Io, say } from '../context.js';
import { computeOptions, parseNumber, storeOption, verb } from '../options.js';
import { print } from '../print.js';
import { runVerb } from '../run-verb.js';
import { readStoredSweep } from '../stored-sweep.js';

interface Options {
  readonly sample: string;
  readonly seed: string;
  readonly tolerance?: string;
}

const PROGRESS_MS = 5_000;

function verdict({ checked, values: { within, beyond }, sameMethod }: RecheckSummary): string {
  if (beyond > 0) return 'Stored rows differ from what is computed now: they were changed, or another machine computes otherwise.';
  if (checked === 0) return 'There was nothing to compare.';
  const ids = sameMethod ? '' : ' The sweep is of another method version, so ids were not compared.';
  return `${within > 0 ? 'All values agree within the tolerance.' : 'All values are the same, bit by bit.'}${ids}`;
}

function text(name: string, summary: RecheckSummary): string {
  const { drawn, checked, unmeasured, cells, values, uncomputable } = summary;
  const pairs = renderPairs([
    ['sweep', name],
    ['points drawn', formatCount(drawn)],
    ['computed again', formatCount(checked)],
    ['without a measure', formatCount(unmeasured)],
    ['cells', formatCount(cells)],
    ['values identical', formatCount(values.identical)],
    ['within tolerance', formatCount(values.within)],
    ['beyond', formatCount(values.beyond)],
  ]);
  const failures = uncomputable.map(
    ({ count, code, message }) => `${formatCount(count)} points cannot be computed here: ${message} (${code})`,
  );
  const differences = comparisonText(values, ['stored', 'computed']);
  return [verdict(summary), pairs, ...failures, ...(differences === '' ? [] : [differences])].join('\n\n');
}

function statusOf({ values, uncomputable }: RecheckSummary): ExitStatus {
  if (values.beyond > 0) return EXIT.failed;
  return uncomputable.length > 0 ? EXIT.failedPoints : EXIT.done;
}

export function recheckCommand(program: Command, io: Io): void {
  const command = verb(program, 'recheck', 'compute random points of a sweep again and compare bit by bit; status 1 where rows differ')
    .argument('<name>', 'name of the sweep')
    .option('--sample <count>', 'number of points to draw', '200')
    .option('--seed <number>', 'which points: the same seed draws the same ones', '0')
    .option('--tolerance <number>', `relative difference that counts as agreement; default ${STANDARD_TOLERANCE}`);
  storeOption(computeOptions(command)).action(
    runVerb<[string], Options>(io, {}, async (context, options, name) => {
      const whole = (value: number): boolean => Number.isSafeInteger(value) && value >= 0;
      const sample = parseNumber('--sample', options.sample, 'a whole number of at least 1', (value) => whole(value) && value > 0);
      const seed = parseNumber('--seed', options.seed, 'a whole number of at least 0', whole);
      const tolerance = parseTolerance(options.tolerance);
      const store = await openStore(context);
      const { record, grid } = await readStoredSweep(store, name);
      let told = performance.now();
      const summary = await recheck({
        record,
        grid,
        store,
        pool: openPool(context),
        memory: memoryLimit(context.settings),
        sample,
        seed,
        tolerance,
        signal: context.signal,
        onProgress: (done, total) => {
          if (performance.now() - told < PROGRESS_MS) return;
          told = performance.now();
          say(context, `windrow: ${formatCount(done)} of ${formatCount(total)} points`);
        },
      });
      await print(context, {
        table: () => text(name, summary),
        json: () => ({ sweep: name, verdict: verdict(summary), ...(summary as unknown as { [key: string]: Json }) }),
        csv: () => ({ columns: COMPARISON_COLUMNS, rows: comparisonRows(summary.values) }),
      });
      return statusOf(summary);
    }),
  );
}
