/**
 * Cells as Apache Parquet: one row a cell, the columns of `export` under the same names and in the same order.
 *
 * Numbers are DOUBLE, bit for bit those of the store; ordinal, question, size and budget are INT64; structures and lists are JSON; an
 * absent value is null. Rows are written in groups, so memory does not grow with their number, and a slow disk holds the source back. The
 * metadata stand in the footer under the key `windrow`.
 */
import type { Writable } from 'node:stream';
import { ByteWriter, ParquetWriter, type SchemaElement } from 'hyparquet-writer';
import type { Json } from '../../core/json.js';
import { CELL_FIELDS, POINT_FIELDS } from '../../sweep/fields.js';
import { type FlatRecord, RECORD_KEYS } from '../flat-record.js';
import { writeBytes } from './bytes.js';
import { METADATA_KEY } from './export-metadata.js';

/** Rows a group: some 10 MB before compression, enough for readers that skip by group. */
const GROUP = 20_000;

type Kind = 'double' | 'whole' | 'text' | 'json';

const KINDS: ReadonlyMap<string, Kind> = new Map<string, Kind>([
  ...['ordinal', 'question', 'size', 'budget'].map((name): [string, Kind] => [name, 'whole']),
  ...['coupling', 'efficiency'].map((name): [string, Kind] => [name, 'double']),
  ...['parameters', 'disorder', 'prepared', 'detected', 'coordinates', 'schedule', 'resolution', 'sampling', 'flags', 'flag_reasons'].map(
    (name): [string, Kind] => [name, 'json'],
  ),
  ...[...POINT_FIELDS, ...CELL_FIELDS].map(({ name, type }): [string, Kind] => [name, type === 'text' ? 'text' : 'double']),
]);

const kindOf = (name: string): Kind => KINDS.get(name) ?? 'text';

const ELEMENTS: Readonly<Record<Kind, Omit<SchemaElement, 'name'>>> = {
  double: { type: 'DOUBLE', repetition_type: 'OPTIONAL' },
  whole: { type: 'INT64', repetition_type: 'OPTIONAL' },
  text: { type: 'BYTE_ARRAY', converted_type: 'UTF8', repetition_type: 'OPTIONAL' },
  json: { type: 'BYTE_ARRAY', converted_type: 'JSON', repetition_type: 'OPTIONAL' },
};

const SCHEMA: SchemaElement[] = [
  { name: 'root', num_children: RECORD_KEYS.length },
  ...RECORD_KEYS.map((name) => ({ name, ...ELEMENTS[kindOf(name)] })),
];

function columnsOf(records: readonly FlatRecord[]) {
  return RECORD_KEYS.map((name) => {
    const kind = kindOf(name);
    const data = records.map((record) => (kind === 'whole' && typeof record[name] === 'number' ? BigInt(record[name]) : record[name]));
    // A dictionary would not tell −0 from 0.
    return kind === 'double' ? { name, data, encoding: 'PLAIN' as const } : { name, data };
  });
}

/**
 * Resolves when everything is handed to `out`, which stays open.
 * @param metadata asked for after the last row
 */
export async function writeParquet(records: AsyncIterable<FlatRecord>, metadata: () => Json, out: Writable): Promise<void> {
  const writer = new ByteWriter();
  const parquet = new ParquetWriter({ writer, schema: SCHEMA, createdBy: 'windrow' });
  const flush = async (): Promise<void> => {
    const bytes = writer.getBytes().slice();
    // Offsets in the file go on counting; only the buffer begins anew.
    writer.index = 0;
    await writeBytes(out, bytes);
  };
  let group: FlatRecord[] = [];
  const writeGroup = async (): Promise<void> => {
    await parquet.write({ columnData: columnsOf(group), rowGroupSize: GROUP });
    group = [];
    await flush();
  };
  for await (const record of records) {
    group.push(record);
    if (group.length === GROUP) await writeGroup();
  }
  if (group.length > 0) await writeGroup();
  parquet.kvMetadata = [{ key: METADATA_KEY, value: JSON.stringify(metadata()) }];
  await parquet.finish();
  await flush();
}
