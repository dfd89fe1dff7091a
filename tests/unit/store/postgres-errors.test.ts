/** States are those of "PostgreSQL Error Codes", appendix A of the PostgreSQL documentation. */
import pg from 'pg';
import { describe, expect, it } from 'vitest';
import { WindrowError } from '../../../src/core/errors.js';
import { isConnectionLoss, toStoreError } from '../../../src/store/postgres/postgres-errors.js';

const ofServer = (code: string, message = 'as the server says'): pg.DatabaseError =>
  Object.assign(new pg.DatabaseError(message, message.length, 'error'), { code });

const ofNode = (code: string): Error => Object.assign(new Error(`connect ${code}`), { code });

describe('errors of the server', () => {
  it.each([
    ['53100', 'disk_full', 'store.full'],
    ['25006', 'read_only_sql_transaction', 'store.full'],
    ['28P01', 'invalid_password', 'store.refused'],
    ['3D000', 'invalid_catalog_name', 'store.refused'],
    ['42501', 'insufficient_privilege', 'store.refused'],
    ['42P01', 'undefined_table', 'store.schema-older'],
    ['42703', 'undefined_column', 'store.schema-older'],
    ['08006', 'connection_failure', 'store.unreachable'],
    ['57P01', 'admin_shutdown', 'store.unreachable'],
    ['57P03', 'cannot_connect_now', 'store.unreachable'],
    ['57014', 'query_canceled', 'store.unreachable'],
    ['40P01', 'deadlock_detected', 'store.unreachable'],
    ['40001', 'serialization_failure', 'store.unreachable'],
    ['53300', 'too_many_connections', 'store.unreachable'],
    ['55P03', 'lock_not_available', 'store.unreachable'],
    ['22003', 'numeric_value_out_of_range', 'internal.invariant'],
    ['23503', 'foreign_key_violation', 'internal.invariant'],
    ['42601', 'syntax_error', 'internal.invariant'],
  ])('%s %s is %s', (state, _name, code) => {
    const error = ofServer(state);
    expect(toStoreError(error, 'here')).toMatchObject({
      code,
      cause: error,
      details: { where: 'here', found: expect.stringContaining(state) },
    });
  });

  it('58030 io_error is a full disk where the message says so', () => {
    expect(toStoreError(ofServer('58030', 'could not write: No space left on device'), 'here').code).toBe('store.full');
  });
});

describe('errors of the network and the system', () => {
  it.each(['ECONNREFUSED', 'ECONNRESET', 'ETIMEDOUT', 'ENOTFOUND', 'EPIPE', 'ENOENT'])('%s can be tried again', (code) => {
    expect(toStoreError(ofNode(code), 'here')).toMatchObject({ code: 'store.unreachable', retryable: true });
  });

  it('several addresses that fail are all named', () => {
    const error = new AggregateError([new Error('connect ECONNREFUSED ::1:5432'), new Error('connect ECONNREFUSED 127.0.0.1:5432')], '');
    expect(toStoreError(error, 'here').details.found).toBe('connect ECONNREFUSED ::1:5432; connect ECONNREFUSED 127.0.0.1:5432');
  });

  it('a full disk is one', () => {
    expect(toStoreError(ofNode('ENOSPC'), 'here').code).toBe('store.full');
  });

  it('a fault of the program is not a fault of the network', () => {
    expect(toStoreError(new TypeError('x is not a function'), 'here')).toMatchObject({ code: 'internal.invariant', retryable: false });
  });
});

it('a WindrowError passes as it is', () => {
  const error = new WindrowError('sweep.unknown', 'no such sweep');
  expect(toStoreError(error, 'here')).toBe(error);
});

it('a connection is given up after its loss, and kept after a refused statement', () => {
  expect(isConnectionLoss(ofNode('ECONNRESET'))).toBe(true);
  expect(isConnectionLoss(ofServer('57P01'))).toBe(true);
  expect(isConnectionLoss(ofServer('23505'))).toBe(false);
  expect(isConnectionLoss(ofServer('57014'))).toBe(false);
});
