/** Errors: what a code carries. The catalogue is held against its documentation and its use in tests/unit/catalogue.test.ts. */
import { describe, expect, it } from 'vitest';
import { CATALOGUE, WindrowError, type ErrorCode } from '../../../src/core/errors.js';

describe('WindrowError', () => {
  it.each(Object.keys(CATALOGUE) as ErrorCode[])('%s carries its exit status and whether trying again can help', (code) => {
    const error = new WindrowError(code, 'text', { where: 'file.yaml', line: 3, found: '1', allowed: '2' });
    expect(error).toBeInstanceOf(Error);
    expect(error).toMatchObject({
      name: 'WindrowError',
      code,
      message: 'text',
      exit: CATALOGUE[code].exit,
      retryable: CATALOGUE[code].retryable,
    });
    expect(error.details).toEqual({ where: 'file.yaml', line: 3, found: '1', allowed: '2' });
    expect(error.cause).toBeUndefined();
  });

  it('hands the cause on', () => {
    const cause = new Error('ECONNREFUSED');
    expect(new WindrowError('store.unreachable', 'text', { cause }).cause).toBe(cause);
  });
});
