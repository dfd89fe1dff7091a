/**
 * PostgreSQL's and the network's errors in windrow's words.
 *
 * Codes are those of "PostgreSQL Error Codes" (appendix A of the PostgreSQL documentation). No message carries a password: the
 * server's never do, and a URL that cannot be parsed is described without being quoted.
 */
import pg from 'pg';
import { WindrowError, type ErrorCode } from '../../core/errors.js';

/** By SQLSTATE, the longest prefix first. */
const BY_STATE: readonly (readonly [prefix: string, code: ErrorCode, message: string])[] = [
  ['53100', 'store.full', 'the disk that holds the store is full'],
  ['25006', 'store.full', 'the store accepts no writes'],
  ['28', 'store.refused', 'the database refuses the user or the password'],
  ['3D000', 'store.refused', 'the database does not exist'],
  ['42501', 'store.refused', 'the database user lacks a right that windrow needs'],
  ['42P01', 'store.schema-older', 'the store needs its migrations: run `windrow migrate`'],
  ['42703', 'store.schema-older', 'the store needs its migrations: run `windrow migrate`'],
  ['3F000', 'store.schema-older', 'the store needs its migrations: run `windrow migrate`'],
  ['08', 'store.unreachable', 'the connection to the store was lost'],
  ['57P', 'store.unreachable', 'the store is starting or stopping'],
  ['57014', 'store.unreachable', 'the store cancelled the statement'],
  ['40', 'store.unreachable', 'the store rolled the transaction back'],
  ['53', 'store.unreachable', 'the store has no resources left for this connection'],
  ['55P03', 'store.unreachable', 'the store could not get a lock in time'],
  ['22', 'internal.invariant', 'a value that the store cannot hold'],
  ['23', 'internal.invariant', 'a row that contradicts the stored ones'],
];

/** True for failures that leave the connection unusable. */
export function isConnectionLoss(error: unknown): boolean {
  return !(error instanceof pg.DatabaseError) || /^(08|57P)/.test(error.code ?? '');
}

/**
 * @param where the server without its password
 * @returns a WindrowError that carries the original as its cause; a WindrowError comes back as it is
 */
export function toStoreError(error: unknown, where: string): WindrowError {
  if (error instanceof WindrowError) return error;
  if (error instanceof pg.DatabaseError) return ofServer(error, where);
  const { code, message } = error as NodeJS.ErrnoException;
  if (code === 'ENOSPC' || code === 'EROFS')
    return new WindrowError('store.full', 'the disk that holds the store is full or read-only', { where, cause: error });
  if (error instanceof TypeError || error instanceof RangeError || error instanceof SyntaxError)
    return new WindrowError('internal.invariant', `the store adapter failed: ${message}`, { where, cause: error });
  return new WindrowError('store.unreachable', 'the store cannot be reached', { where, found: described(error), cause: error });
}

function ofServer(error: pg.DatabaseError, where: string): WindrowError {
  const state = error.code ?? '';
  const details = { where, found: `${error.message} (SQLSTATE ${state})`, cause: error };
  if (/No space left on device|Disk quota exceeded/.test(error.message))
    return new WindrowError('store.full', 'the disk that holds the store is full', details);
  const entry = BY_STATE.find(([prefix]) => state.startsWith(prefix));
  return entry === undefined
    ? new WindrowError('internal.invariant', 'the store refused a statement', details)
    : new WindrowError(entry[1], entry[2], details);
}

/** Node reports several failed addresses of one host as an AggregateError with an empty message. */
function described(error: unknown): string {
  if (error instanceof AggregateError) return error.errors.map(described).join('; ');
  return error instanceof Error ? error.message : String(error);
}
