/** Printing data on stdout in the format that was asked for. */
import { finished } from 'node:stream/promises';
import type { Writable } from 'node:stream';
import type { Json } from '../core/json.js';
import { writeCsv } from '../report/export.js';
import type { Context } from './context.js';

export interface Printable {
  /** For people. */
  readonly table: () => string | Promise<string>;
  /** One document. */
  readonly json: () => Json;
  /** Flat rows with the columns of a CSV file. */
  readonly csv: () => { readonly columns: readonly string[]; readonly rows: readonly { readonly [column: string]: Json }[] };
}

/** Resolves when the text is handed to the stream, waiting where its reader is slow. */
export async function writeText(out: Writable, text: string): Promise<void> {
  if (out.destroyed) return;
  await new Promise<void>((resolve, reject) => {
    out.write(text, (error) => (error ? reject(error) : resolve()));
  });
}

export async function print({ out, format }: Pick<Context, 'out' | 'format'>, data: Printable): Promise<void> {
  if (format === 'table') return writeText(out, `${await data.table()}\n`);
  if (format === 'json') return writeText(out, `${JSON.stringify(data.json(), null, 2)}\n`);
  const { columns, rows } = data.csv();
  return writeCsv(rows, columns, out);
}

/** Ends a file and waits until it is on its way to the disk. */
export async function endOf(stream: Writable): Promise<void> {
  stream.end();
  await finished(stream);
}
