import { describe, expect, it } from 'vitest';
import { WindrowError } from '../../../src/core/errors.js';
import { backoffDelay, pause, withRetry } from '../../../src/core/retry.js';

const away = (): WindrowError => new WindrowError('store.unreachable', 'away');
const backoff = { firstMs: 1, ceilingMs: 2 };

describe('withRetry', () => {
  const failing = (times: number, error: () => Error = away) => {
    let calls = 0;
    const work = async (): Promise<number> => {
      if (++calls <= times) throw error();
      return calls;
    };
    return { work, calls: () => calls };
  };

  it('repeats until the work succeeds', async () => {
    expect(await withRetry(failing(3).work, { backoff })).toBe(4);
  });

  it('gives up after its attempts, with the last error', async () => {
    const { work, calls } = failing(9);
    await expect(withRetry(work, { attempts: 3, backoff })).rejects.toMatchObject({ code: 'store.unreachable' });
    expect(calls()).toBe(3);
  });

  it.each([
    ['a lasting fault', () => new WindrowError('store.full', 'full')],
    ['a wrong input', () => new WindrowError('sweep.value', 'wrong')],
    ['a programming error', () => new TypeError('not a function')],
  ])('does not repeat after %s', async (_, error) => {
    const { work, calls } = failing(1, error);
    await expect(withRetry(work, { backoff })).rejects.toThrow(error().message);
    expect(calls()).toBe(1);
  });

  it('stops waiting when it is aborted', async () => {
    const controller = new AbortController();
    const { work, calls } = failing(9);
    const result = withRetry(work, { backoff: { firstMs: 60_000, ceilingMs: 60_000 }, signal: controller.signal });
    controller.abort();
    await expect(result).rejects.toMatchObject({ code: 'store.unreachable' });
    expect(calls()).toBeLessThanOrEqual(2);
  });
});

describe('pauses', () => {
  it('double up to the ceiling', () => {
    expect([1, 2, 3, 4, 20].map((attempt) => backoffDelay(attempt, { firstMs: 100, ceilingMs: 700 }))).toEqual([100, 200, 400, 700, 700]);
  });

  it('end at once when aborted, before or during them', async () => {
    const controller = new AbortController();
    const long = pause(60_000, controller.signal);
    controller.abort();
    await long;
    await pause(60_000, controller.signal);
  });
});
