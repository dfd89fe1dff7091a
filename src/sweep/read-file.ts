/** Sweep files on disk: the only part of this room that touches the file system. */
import { readFileSync, statSync } from 'node:fs';
import { dirname, resolve } from 'node:path';
import { WindrowError } from '../core/errors.js';
import type { SweepDocument } from './document.js';
import { INTERVALS_FILE_LIMIT, parseIntervals } from './intervals-file.js';
import { readSweep, type ReadOptions } from './read.js';
import { decode, FILE_LIMIT } from './source.js';

/**
 * The document of a sweep file on disk. Files of intervals are looked for relative to it.
 * @throws WindrowError sweep.file when it cannot be read, and everything readSweep throws
 */
export function readSweepFile(path: string, options: Pick<ReadOptions, 'allowLarge'> = {}): SweepDocument {
  const folder = dirname(path);
  return readSweep(readBytes(path, FILE_LIMIT), {
    ...options,
    file: path,
    loadIntervals: (name) => readIntervalsFile(resolve(folder, name)),
  });
}

/** Measured intervals of a file. @throws WindrowError sweep.file, sweep.value */
export function readIntervalsFile(file: string): readonly number[] {
  return parseIntervals(decode(readBytes(file, INTERVALS_FILE_LIMIT), file, INTERVALS_FILE_LIMIT), file);
}

const REASONS: Readonly<Record<string, string>> = {
  ENOENT: 'no such file',
  EACCES: 'no permission to read it',
  EISDIR: 'a folder',
  ENOTDIR: 'a path through something that is no folder',
};

function readBytes(path: string, limit: number): Uint8Array {
  const refuse = (found: string, allowed: string, cause?: unknown): WindrowError =>
    new WindrowError('sweep.file', 'a file that cannot be read', {
      where: path,
      found,
      allowed,
      ...(cause === undefined ? {} : { cause }),
    });
  try {
    const status = statSync(path);
    // A pipe or device may never end; a folder has no text.
    if (!status.isFile()) throw refuse(status.isDirectory() ? 'a folder' : 'something that is not a regular file', 'a regular file');
    if (status.size > limit) throw refuse(`${status.size} bytes`, `at most ${limit} bytes`);
    return readFileSync(path);
  } catch (error) {
    if (error instanceof WindrowError) throw error;
    const code = (error as NodeJS.ErrnoException).code ?? '';
    throw refuse(REASONS[code] ?? code, 'a readable file', error);
  }
}
