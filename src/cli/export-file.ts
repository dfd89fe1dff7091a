/** Files for other tools: the data in the form that was asked for, with what the sweep says about them. */
import { createHash } from 'node:crypto';
import { once } from 'node:events';
import { createReadStream, createWriteStream } from 'node:fs';
import type { Writable } from 'node:stream';
import { pipeline } from 'node:stream/promises';
import { WindrowError } from '../core/errors.js';
import { writeCsv, writeJsonLines } from '../report/export.js';
import { emptyTally, exportMetadata, type ExportSource, tallied } from '../report/files/export-metadata.js';
import type { ReadMeasures } from '../report/files/npz-file.js';
import { type FlatRecord, flatRecord, RECORD_KEYS } from '../report/flat-record.js';
import type { CellRow } from '../store/types.js';
import { endOf, writeText } from './print.js';

export const FILE_KINDS = ['parquet', 'npz', 'csv', 'jsonl'] as const;
export type FileKind = (typeof FILE_KINDS)[number];

/** CSV and JSON lines have no place for metadata: they stand in a file of this name beside them. */
export const METADATA_SUFFIX = '.metadata.json';

export async function* records(rows: AsyncIterable<CellRow>, sweep: string): AsyncIterable<FlatRecord> {
  for await (const row of rows) yield flatRecord(row, sweep);
}

/** @throws WindrowError `report.unwritable`, and whatever `work` throws itself */
export async function writeFileOf(path: string, work: (out: Writable) => Promise<void>): Promise<void> {
  const file = createWriteStream(path);
  // Whoever writes is told as well; without a listener the event would end the process.
  file.on('error', () => undefined);
  try {
    await once(file, 'open');
    await work(file);
    await endOf(file);
  } catch (cause) {
    if (cause instanceof WindrowError) throw cause;
    const found = cause instanceof Error ? cause.message : String(cause);
    throw new WindrowError('report.unwritable', 'an export cannot be written', {
      where: path,
      found,
      allowed: 'a file that can be written',
      cause,
    });
  }
}

async function digestOfFile(path: string): Promise<string> {
  const hash = createHash('sha256');
  await pipeline(createReadStream(path), hash);
  return hash.digest('hex');
}

export interface FileSource extends ExportSource {
  /** one snapshot, in the grid's order */
  readonly rows: AsyncIterable<CellRow>;
  readonly measures: ReadMeasures;
}

/**
 * @returns the files that were written
 * @throws WindrowError `report.unwritable`
 */
export async function writeExportFile(source: FileSource, kind: FileKind, path: string): Promise<string[]> {
  const tally = emptyTally();
  const rows = tallied(source.rows, tally);
  const flat = records(rows, source.record.name);
  const metadata = () => exportMetadata(source, tally);
  // Libraries of one form are loaded where they are needed.
  switch (kind) {
    case 'parquet': {
      const { writeParquet } = await import('../report/files/parquet-file.js');
      await writeFileOf(path, (out) => writeParquet(flat, metadata, out));
      return [path];
    }
    case 'npz': {
      const { writeNpz } = await import('../report/files/npz-file.js');
      const axes = source.grid.axes.map(({ name }) => name);
      await writeFileOf(path, (out) => writeNpz({ rows, axes, measures: source.measures, metadata }, out));
      return [path];
    }
    case 'csv':
    case 'jsonl': {
      await writeFileOf(path, (out) => (kind === 'csv' ? writeCsv(flat, RECORD_KEYS, out) : writeJsonLines(flat, out)));
      const file_sha256 = await digestOfFile(path);
      const beside = `${path}${METADATA_SUFFIX}`;
      await writeFileOf(beside, (out) => writeText(out, `${JSON.stringify({ ...metadata(), file_sha256 }, null, 2)}\n`));
      return [path, beside];
    }
  }
}
