/**
 * Reading sweep files: text in, a checked document out, or exactly one WindrowError that says file, line, key, what was found and
 * what is allowed. Pure: files that the text refers to are read by a function that is handed in (read-file.ts).
 */
import { WindrowError } from '../core/errors.js';
import type { Json } from '../core/json.js';
import { checkDocument } from './check.js';
import { normalise, type SweepDocument } from './document.js';
import { isMissing } from './issues.js';
import { Refusal, refusalError, type KeyPath } from './refusal.js';
import { decode, parseSource } from './source.js';

export interface ReadOptions {
  /** Name of the file for messages; default 'sweep file'. One that ends in .json is held to strict JSON. */
  readonly file?: string;
  /** Accept a grid above the cell limit. */
  readonly allowLarge?: boolean;
  /** Intervals of a file that an empirical schedule names. Without it such a schedule is refused. */
  readonly loadIntervals?: (path: string) => readonly number[];
}

/**
 * The document of a sweep file.
 * @throws WindrowError sweep.file, sweep.syntax, sweep.key, sweep.value, sweep.too-large, model.*, state.*, schedule.*
 */
export function readSweep(source: string | Uint8Array, options: ReadOptions = {}): SweepDocument {
  const file = options.file ?? 'sweep file';
  const text = typeof source === 'string' ? source : decode(source, file);
  const parsed = parseSource(text, file);
  const lineOf = (refusal: Refusal): number => parsed.lineOf(refusal.path);
  const before = (a: Refusal, b: Refusal): boolean => (isMissing(a) === isMissing(b) ? lineOf(a) < lineOf(b) : isMissing(b));
  try {
    const value = loadFiles(parsed.value, options.loadIntervals);
    const document = normalise(value, (all) => all.reduce((first, one) => (before(one, first) ? one : first)));
    checkDocument(document, options.allowLarge ?? false);
    return document;
  } catch (error) {
    throw error instanceof Refusal ? refusalError(error, file, lineOf(error)) : error;
  }
}

/**
 * The document of a value that is already parsed: what a store keeps, or what another program or a command line puts together.
 * @throws WindrowError as readSweep, without file and line
 */
export function documentFromJson(value: Json, options: Pick<ReadOptions, 'allowLarge'> = {}): SweepDocument {
  try {
    const document = normalise(value);
    checkDocument(document, options.allowLarge ?? true);
    return document;
  } catch (error) {
    throw error instanceof Refusal ? refusalError(error) : error;
  }
}

/** Replaces `file` in empirical schedules by the intervals that stand there, so that the document holds all it depends on. */
function loadFiles(root: unknown, load: ReadOptions['loadIntervals']): unknown {
  const schedules = (root as { schedules?: unknown } | null)?.schedules;
  if (!Array.isArray(schedules)) return root;
  return { ...(root as object), schedules: schedules.map((entry: unknown, index) => loadEntry(entry, ['schedules', index], load)) };
}

function loadEntry(entry: unknown, path: KeyPath, load: ReadOptions['loadIntervals']): unknown {
  if (typeof entry !== 'object' || entry === null || !('file' in entry) || (entry as { family?: unknown }).family !== 'empirical')
    return entry;
  const { file, ...others } = entry as Record<string, unknown>;
  const where: KeyPath = [...path, 'file'];
  const names = Array.isArray(file) ? (file as unknown[]) : [file];
  if ('intervals' in others) {
    throw new Refusal('sweep.key', where, 'intervals are given twice', { found: 'file and intervals', allowed: 'one of file, intervals' });
  }
  const lists = names.map((name) => {
    if (typeof name !== 'string' || name === '') {
      throw new Refusal('sweep.value', where, 'a value that is not allowed', {
        found: JSON.stringify(name) ?? 'nothing',
        allowed: 'a path or a list of paths',
      });
    }
    if (load === undefined) {
      throw new Refusal('sweep.value', where, 'files cannot be read here', {
        found: name,
        allowed: 'intervals: a list of measured intervals',
      });
    }
    return loaded(load, name, where);
  });
  return { ...others, intervals: { values: lists } };
}

/** A file that is not there is a fault of the line that names it; a wrong entry in it is a fault of its own line. */
function loaded(load: (path: string) => readonly number[], name: string, where: KeyPath): readonly number[] {
  try {
    return load(name);
  } catch (error) {
    if (!(error instanceof WindrowError) || error.code !== 'sweep.file') throw error;
    const { found, allowed, where: file } = error.details;
    throw new Refusal('sweep.file', where, `${error.message}: ${file ?? name}`, {
      ...(found === undefined ? {} : { found }),
      ...(allowed === undefined ? {} : { allowed }),
      cause: error,
    });
  }
}
