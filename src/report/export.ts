/**
 * Exports as streams: CSV and JSON lines. Memory does not grow with the number of rows, and back-pressure of the reader is respected.
 *
 * CSV follows RFC 4180 with a header and \n line ends; an absent value is an empty field, a structured one is its canonical JSON.
 * Numbers are in the shortest form that reads back to the same double.
 */
import { Readable, Transform, type Writable } from 'node:stream';
import { pipeline } from 'node:stream/promises';
import { stringify } from 'csv-stringify';
import { canonicalJson, type Json } from '../core/json.js';

/** A cell of a CSV file. */
export function csvText(value: Json | undefined): string {
  if (value === null || value === undefined) return '';
  if (typeof value === 'string') return value;
  // −0 is a value of its own to a reader that divides by it.
  if (typeof value === 'number') return Object.is(value, -0) ? '-0' : String(value);
  return typeof value === 'boolean' ? String(value) : canonicalJson(value);
}

type Records = Iterable<{ readonly [key: string]: Json }> | AsyncIterable<{ readonly [key: string]: Json }>;

/** Resolves when every record is handed to `out`; `out` stays open. */
export async function writeCsv(records: Records, columns: readonly string[], out: Writable): Promise<void> {
  const lines = new Transform({
    writableObjectMode: true,
    readableObjectMode: true,
    transform: (record: { readonly [key: string]: Json }, _, done) =>
      done(
        null,
        columns.map((column) => csvText(record[column])),
      ),
  });
  await pipeline(Readable.from(records), lines, stringify({ header: true, columns: [...columns] }), out, { end: false });
}

/** One JSON object a line. */
export async function writeJsonLines(records: Records, out: Writable): Promise<void> {
  const lines = new Transform({
    writableObjectMode: true,
    transform: (record: Json, _, done) => done(null, `${JSON.stringify(record)}\n`),
  });
  await pipeline(Readable.from(records), lines, out, { end: false });
}
