/**
 * One flat object a cell: what `export` and `point` print. Keys are the same everywhere, in this order: identity and place, the system,
 * the question, every field of the point and of the cell in full precision, flags, failure. Absent numbers are null.
 */
import type { Json } from '../core/json.js';
import type { CellRow } from '../store/types.js';
import { CELL_FIELDS, POINT_FIELDS } from '../sweep/fields.js';

export type FlatRecord = { readonly [key: string]: Json };

const SYSTEM_KEYS = [
  'sweep',
  'ordinal',
  'question',
  'model',
  'size',
  'coupling',
  'parameters',
  'disorder',
  'prepared',
  'detected',
] as const;
const QUESTION_KEYS = ['coordinates', 'schedule', 'resolution', 'budget', 'efficiency', 'sampling'] as const;
const LAST_KEYS = ['flags', 'flag_reasons', 'status', 'failure_code', 'failure_message', 'point_id', 'cell_id'] as const;

/** Keys of every flat record; the header of a CSV export. */
export const RECORD_KEYS: readonly string[] = [
  ...SYSTEM_KEYS,
  ...QUESTION_KEYS,
  ...POINT_FIELDS.map(({ name }) => name),
  ...CELL_FIELDS.map(({ name }) => name),
  ...LAST_KEYS,
];

function fieldValues(source: object | null, names: readonly { readonly name: string }[]): [string, Json][] {
  return names.map(({ name }) => [name, (source as Record<string, Json> | null)?.[name] ?? null]);
}

/** @param sweep name of the sweep, null for a point computed by itself */
export function flatRecord(row: CellRow, sweep: string | null): FlatRecord {
  const { spec, question, point, fields, failure } = row;
  return {
    sweep,
    ordinal: row.ordinal,
    question: row.questionOrdinal,
    model: spec.model,
    size: spec.size,
    coupling: spec.coupling,
    parameters: spec.parameters,
    disorder: spec.disorder as Json,
    prepared: spec.prepared,
    detected: spec.detected,
    coordinates: row.coordinates,
    schedule: question.schedule,
    resolution: question.resolution,
    budget: question.budget,
    efficiency: question.detector.efficiency,
    sampling: question.sampling,
    ...Object.fromEntries(fieldValues(point, POINT_FIELDS)),
    ...Object.fromEntries(fieldValues(fields, CELL_FIELDS)),
    flags: [...new Set([...(point?.flags ?? []), ...(fields?.flags ?? [])])],
    flag_reasons: [...new Set([...(point?.flag_reasons ?? []), ...(fields?.flag_reasons ?? [])])],
    status: fields ? 'computed' : failure ? 'failed' : 'missing',
    failure_code: failure?.code ?? null,
    failure_message: failure?.message ?? null,
    point_id: row.pointId,
    cell_id: row.cellId,
  };
}
