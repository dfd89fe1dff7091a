/** Tables for people: plain rules, numbers to the right. */
import Table from 'cli-table3';

export interface TableColumn<Row> {
  readonly title: string;
  readonly value: (row: Row) => string;
  readonly align?: 'left' | 'right';
  /** Long text is wrapped to this many characters. */
  readonly width?: number;
}

const NO_FRAME = {
  top: '',
  'top-mid': '',
  'top-left': '',
  'top-right': '',
  bottom: '',
  'bottom-mid': '',
  'bottom-left': '',
  'bottom-right': '',
  left: '',
  'left-mid': '',
  mid: '',
  'mid-mid': '',
  right: '',
  'right-mid': '',
  middle: '  ',
};

/** @returns lines joined by newlines, without a trailing one; no colour, so that it reads the same in a file */
export function renderTable<Row>(rows: readonly Row[], columns: readonly TableColumn<Row>[]): string {
  const table = new Table({
    head: columns.map(({ title }) => title),
    chars: NO_FRAME,
    style: { head: [], border: [], 'padding-left': 0, 'padding-right': 0 },
    colAligns: columns.map(({ align }) => align ?? 'left'),
    colWidths: columns.map(({ width }) => width ?? null),
    wordWrap: true,
  });
  for (const row of rows) table.push(columns.map(({ value }) => value(row)));
  return table
    .toString()
    .split('\n')
    .map((line) => line.trimEnd())
    .join('\n');
}

/** Two columns, names and values. */
export function renderPairs(pairs: readonly (readonly [name: string, value: string])[]): string {
  const width = Math.max(...pairs.map(([name]) => name.length), 0);
  return pairs.map(([name, value]) => `${name.padEnd(width)}  ${value}`.trimEnd()).join('\n');
}
