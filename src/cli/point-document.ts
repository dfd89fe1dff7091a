/** The document of one point: a sweep file or a stored sweep, and `--set key=value` on top; `point` and `trace` share it. */
import { WindrowError } from '../core/errors.js';
import { findModel, modelFamilies } from '../models/registry.js';
import { readSweepFile } from '../sweep/read-file.js';
import { parsePairs } from './options.js';

export interface PointOptions {
  readonly model?: string;
  readonly set?: string[];
  readonly certify?: true;
}

export type Document = { [key: string]: unknown };

/** Keys of a sweep file; any other key of --set is a parameter of the model. */
const DOCUMENT_KEYS = new Set([
  'size',
  'coupling',
  'parameters',
  'prepare',
  'detect',
  'schedules',
  'resolution',
  'budget',
  'disorder',
  'sampling',
  'detector',
  'certify',
]);

/** What a point is asked when nothing else is said. */
const DEFAULTS = { schedules: [{ family: 'exponential', mean: 1 }], budget: 1000 } as const;

function assign(document: Document, path: readonly string[], value: unknown): void {
  const [key, ...rest] = path as [string, ...string[]];
  if (rest.length === 0) document[key] = value;
  else {
    const inner = { ...((document[key] as Document | undefined) ?? {}) };
    assign(inner, rest, value);
    document[key] = inner;
  }
}

/** `as` and `schedule` are short for `coupling.as` and a list of one schedule. */
export function override(document: Document, pairs: readonly (readonly [string, unknown])[]): Document {
  const changed = { ...document };
  const scale =
    pairs.find(([key]) => key === 'as' || key === 'coupling.as')?.[1] ?? (document['coupling'] as { as?: unknown } | undefined)?.as;
  for (const [key, value] of pairs) {
    if (key === 'as' || key === 'coupling.as') continue;
    if (key === 'schedule') changed['schedules'] = [value];
    else if (key === 'coupling') changed['coupling'] = { values: [value], ...(scale === undefined ? {} : { as: scale }) };
    else {
      const path = key.split('.');
      assign(changed, DOCUMENT_KEYS.has(path[0]) ? path : ['parameters', key], value);
    }
  }
  return changed;
}

/** @throws WindrowError cli.usage; what reading the file throws */
export function pointDocument(file: string | undefined, { model, set, certify }: PointOptions): Document {
  const pairs = [...parsePairs('--set', set ?? []), ...(certify === true ? [['certify', true] as const] : [])];
  if (file !== undefined) {
    const read = readSweepFile(file, { allowLarge: true }) as unknown as Document;
    return override(model === undefined ? read : { ...read, model }, pairs);
  }
  if (model === undefined) {
    throw new WindrowError('cli.usage', 'a point needs a sweep file or --model', { allowed: [...modelFamilies.keys()].join(', ') });
  }
  const family = findModel(model);
  return override({ name: 'point', model, prepare: family.states[0]?.name, ...DEFAULTS }, pairs);
}
