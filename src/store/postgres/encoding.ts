/**
 * Values on their way to and from PostgreSQL: array literals for multi-row writes, and parsers that return what was stored.
 *
 * Doubles cross as shortest round-trip text in both directions, so every bit pattern but the payload of a NaN survives: −0, denormals
 * and infinities included (the reader must run with extra_float_digits ≥ 1, PostgreSQL's default; see database.ts). Ids are 64
 * lower-case hexadecimal digits outside and bytea inside.
 */
import type { CustomTypesConfig } from 'pg';
import { types } from 'pg';

const OID = { bytea: 17, int8: 20, float8: 701, jsonb: 3802, float8Array: 1022, textArray: 1009, timestamptz: 1184 } as const;

/** String() drops the sign of −0. */
const double = (value: number): string => (Object.is(value, -0) ? '-0' : String(value));

const quoted = (text: string): string => `"${text.replace(/["\\]/g, '\\$&')}"`;

function literal<T>(values: Iterable<T>, element: (value: T & {}) => string): string {
  const parts: string[] = [];
  for (const value of values) parts.push(value === null || value === undefined ? 'NULL' : element(value));
  return `{${parts.join(',')}}`;
}

/** Literal of float8[]. */
export const doubles = (values: Iterable<number | null>): string => literal(values, double);

/** Literal of text[]; an element may itself be an array literal that the statement casts. */
export const texts = (values: Iterable<string | null>): string => literal(values, quoted);

/** Literal of bigint[] or integer[]. */
export const integers = (values: Iterable<number>): string => literal(values, String);

/** Literal of bytea[] from ids. */
export const ids = (values: Iterable<string>): string => literal(values, (id) => `"\\\\x${id}"`);

/** One bytea from an id. */
export const id = (value: string): string => `\\x${value}`;

/** @param text output of float8[] without NULL elements */
export function parseDoubles(text: string): Float64Array {
  return text === '{}' ? new Float64Array(0) : Float64Array.from(text.slice(1, -1).split(','), Number);
}

type Parser = (text: string) => unknown;

const parsers = new Map<number, Parser>([
  [OID.bytea, (text) => text.slice(2)],
  [OID.int8, Number],
  [OID.float8, Number],
  [OID.float8Array, parseDoubles],
  // Parsed by the reader, which knows where the same text comes again.
  [OID.jsonb, (text) => text],
  [OID.timestamptz, (text) => new Date(text).toISOString()],
]);

/** Type parsers of windrow's connections; the driver's own ones serve the rest. */
export const typeParsers: CustomTypesConfig & { getTypeParser(oid: number, format?: 'text' | 'binary'): Parser } = {
  getTypeParser: (oid: number, format?: 'text' | 'binary') =>
    (format === 'binary' ? undefined : parsers.get(oid)) ?? (types.getTypeParser as (oid: number, format?: string) => Parser)(oid, format),
};
