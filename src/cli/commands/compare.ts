/** `windrow compare A B`: the results of two sweeps, cell by cell. */
import type { Command } from 'commander';
import { compareRows, type SweepComparison } from '../../analysis/compare.js';
import type { Json } from '../../core/json.js';
import { formatCount } from '../../report/format.js';
import { renderPairs } from '../../report/table.js';
import type { SweepRecord } from '../../store/types.js';
import { COMPARISON_COLUMNS, comparisonRows, comparisonText, parseTolerance, STANDARD_TOLERANCE } from '../comparison-view.js';
import { openStore } from '../compose.js';
import { EXIT, type Io } from '../context.js';
import { storeOption, verb } from '../options.js';
import { print } from '../print.js';
import { runVerb } from '../run-verb.js';
import { findStoredSweep } from '../stored-sweep.js';

interface Options {
  readonly tolerance?: string;
}

function verdict({ values, common, ...counts }: SweepComparison): string {
  if (common === 0) return 'The two have no cell in common: no point of one is asked a question of the other.';
  const missing = counts.only_a + counts.only_b + counts.answered_only_a + counts.answered_only_b;
  const gaps = missing > 0 ? ' Some cells are in one of them only.' : '';
  if (values.compared === 0) return `No common cell has numbers in both.${gaps}`;
  const { within, beyond } = values;
  const words =
    beyond > 0
      ? 'Values differ beyond the tolerance.'
      : within > 0
        ? 'All values agree within the tolerance.'
        : 'All values are the same, bit by bit.';
  return words + gaps;
}

function text(a: SweepRecord, b: SweepRecord, comparison: SweepComparison): string {
  const { values } = comparison;
  const pairs = renderPairs([
    ['a', `${a.name} (method ${a.methodVersion})`],
    ['b', `${b.name} (method ${b.methodVersion})`],
    ['common cells', formatCount(comparison.common)],
    ['only in a', formatCount(comparison.only_a)],
    ['only in b', formatCount(comparison.only_b)],
    ['numbers only in a', formatCount(comparison.answered_only_a)],
    ['numbers only in b', formatCount(comparison.answered_only_b)],
    ['values identical', formatCount(values.identical)],
    ['within tolerance', formatCount(values.within)],
    ['beyond', formatCount(values.beyond)],
  ]);
  const differences = comparisonText(values, ['a', 'b']);
  return [verdict(comparison), pairs, ...(differences === '' ? [] : [differences])].join('\n\n');
}

export function compareCommand(program: Command, io: Io): void {
  const command = verb(program, 'compare', 'two sweeps cell by cell: what is changed, missing, or beyond tolerance')
    .argument('<a>', 'name of a sweep')
    .argument('<b>', 'name of another, such as the same file under another version of the methods')
    .option('--tolerance <number>', `relative difference that counts as agreement; default ${STANDARD_TOLERANCE}`);
  storeOption(command).action(
    runVerb<[string, string], Options>(io, {}, async (context, options, nameA, nameB) => {
      const tolerance = parseTolerance(options.tolerance);
      const store = await openStore(context);
      const [a, b] = [await findStoredSweep(store, nameA), await findStoredSweep(store, nameB)];
      const comparison = await compareRows(store.cells({ sweep: a.name }), store.cells({ sweep: b.name }), tolerance);
      await print(context, {
        table: () => text(a, b, comparison),
        json: () => ({
          a: { sweep: a.name, method_version: a.methodVersion },
          b: { sweep: b.name, method_version: b.methodVersion },
          verdict: verdict(comparison),
          ...(comparison as unknown as { [key: string]: Json }),
        }),
        csv: () => ({ columns: COMPARISON_COLUMNS, rows: comparisonRows(comparison.values) }),
      });
      return EXIT.done;
    }),
  );
}
