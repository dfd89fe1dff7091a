/** Comparisons as text, rows and documents; `compare` and `recheck` share it. */
import type { Comparison, Difference } from '../sweep/ledger.js';
import type { Json } from '../core/json.js';
import { coordinatesText, formatCount, formatNumber } from '../report/format.js';
import { renderTable } from '../report/table.js';
import { parseNumber } from './options.js';

/** Relative difference that counts as agreement: far above rounding, far below what a figure shows. */
export const STANDARD_TOLERANCE = 1e-9;

export function parseTolerance(text: string | undefined): number {
  if (text === undefined) return STANDARD_TOLERANCE;
  return parseNumber('--tolerance', text, 'a number from 0, below 1', (value) => value >= 0 && value < 1);
}

const shown = (value: Json): string =>
  typeof value === 'number' ? formatNumber(value, 12) : value === null ? '–' : typeof value === 'string' ? value : JSON.stringify(value);

function placeText({ coordinates, question }: Difference): string {
  return (
    [coordinatesText(coordinates), ...(question === null ? [] : [`question ${question}`])].filter((part) => part !== '').join(', ') || '–'
  );
}

/** Fields that differ, then the gravest differences; empty where all is identical. */
export function comparisonText({ fields, differences }: Comparison, names: readonly [a: string, b: string]): string {
  const differing = fields.filter(({ within, beyond }) => within + beyond > 0);
  if (differing.length === 0) return '';
  const table = renderTable(differing, [
    { title: 'field', value: ({ field }) => field },
    { title: 'compared', value: ({ compared }) => formatCount(compared), align: 'right' },
    { title: 'within', value: ({ within }) => formatCount(within), align: 'right' },
    { title: 'beyond', value: ({ beyond }) => formatCount(beyond), align: 'right' },
    { title: 'largest relative', value: ({ largest }) => formatNumber(largest, 3), align: 'right' },
  ]);
  const gravest = renderTable(differences, [
    { title: 'at', value: placeText },
    { title: 'field', value: ({ field }) => field },
    { title: names[0], value: ({ a }) => shown(a), width: 28 },
    { title: names[1], value: ({ b }) => shown(b), width: 28 },
    { title: 'relative', value: ({ relative }) => formatNumber(relative, 3), align: 'right' },
    { title: '', value: ({ verdict }) => verdict },
  ]);
  return `${table}\n\n${gravest}`;
}

export const COMPARISON_COLUMNS = ['field', 'compared', 'identical', 'within', 'beyond', 'largest'] as const;

export function comparisonRows({ fields }: Comparison): { [column in (typeof COMPARISON_COLUMNS)[number]]: string | number }[] {
  return fields.map(({ field, compared, identical, within, beyond, largest }) => ({ field, compared, identical, within, beyond, largest }));
}
