/**
 * Multi-row inserts: one statement a table, one array parameter a column, rows whose key is stored left as they are.
 *
 * Rows are written in the order given. Callers sort by key, so that transactions that write the same rows take their locks in the same
 * order and never deadlock.
 */
import type { ClientBase } from 'pg';
import { doubles, ids, integers, texts } from './encoding.js';

export interface Column<Row> {
  readonly name: string;
  /** type of the array parameter */
  readonly array: 'bytea[]' | 'float8[]' | 'bigint[]' | 'text[]';
  /** what an element is cast to: array and JSON columns travel as text */
  readonly cast?: 'float8[]' | 'text[]' | 'jsonb';
  encode(rows: readonly Row[]): string;
}

export const idColumn = <Row>(name: string, value: (row: Row) => string): Column<Row> => ({
  name,
  array: 'bytea[]',
  encode: (rows) => ids(rows.map(value)),
});

export const doubleColumn = <Row>(name: string, value: (row: Row) => number | null): Column<Row> => ({
  name,
  array: 'float8[]',
  encode: (rows) => doubles(rows.map(value)),
});

export const integerColumn = <Row>(name: string, value: (row: Row) => number): Column<Row> => ({
  name,
  array: 'bigint[]',
  encode: (rows) => integers(rows.map(value)),
});

export const textColumn = <Row>(name: string, value: (row: Row) => string | null): Column<Row> => ({
  name,
  array: 'text[]',
  encode: (rows) => texts(rows.map(value)),
});

export const listColumn = <Row>(name: string, value: (row: Row) => readonly string[]): Column<Row> => ({
  name,
  array: 'text[]',
  cast: 'text[]',
  encode: (rows) => texts(rows.map((row) => texts(value(row)))),
});

export const doublesColumn = <Row>(name: string, value: (row: Row) => Float64Array | null): Column<Row> => ({
  name,
  array: 'text[]',
  cast: 'float8[]',
  encode: (rows) =>
    texts(
      rows.map((row) => {
        const list = value(row);
        return list === null ? null : doubles(list);
      }),
    ),
});

export const jsonColumn = <Row>(name: string, value: (row: Row) => unknown): Column<Row> => ({
  name,
  array: 'text[]',
  cast: 'jsonb',
  encode: (rows) => texts(rows.map((row) => JSON.stringify(value(row)))),
});

/** @returns a function that inserts rows into `table` */
export function inserter<Row>(table: string, columns: readonly Column<Row>[]): (client: ClientBase, rows: readonly Row[]) => Promise<void> {
  const names = columns.map(({ name }) => name).join(', ');
  const values = columns.map(({ name, cast }) => (cast === undefined ? name : `${name}::${cast}`)).join(', ');
  const parameters = columns.map(({ array }, index) => `$${index + 1}::${array}`).join(', ');
  const text = `insert into ${table} (${names}) select ${values} from unnest(${parameters}) as row(${names}) on conflict do nothing`;
  return async (client, rows) => {
    if (rows.length === 0) return;
    await client.query(
      text,
      columns.map((column) => column.encode(rows)),
    );
  };
}

/** A copy of `rows` in ascending order of their keys, which are ASCII. */
export function sortedBy<Row>(rows: readonly Row[], key: (row: Row) => string): Row[] {
  return rows
    .map((row) => ({ row, key: key(row) }))
    .sort((a, b) => (a.key < b.key ? -1 : a.key > b.key ? 1 : 0))
    .map(({ row }) => row);
}
