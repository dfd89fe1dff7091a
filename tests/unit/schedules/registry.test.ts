/** Schedules as written: completion, refusals with where, found and allowed, and what every family declares. */
import { describe, expect, it } from 'vitest';
import { WindrowError } from '../../../src/core/errors.js';
import { buildSchedule, canonicalSchedule, parameterNames, scheduleFamilies } from '../../../src/schedules/registry.js';

function refusal(raw: unknown): WindrowError {
  try {
    canonicalSchedule(raw);
  } catch (error) {
    if (error instanceof WindrowError) return error;
  }
  throw new Error(`not refused: ${JSON.stringify(raw)}`);
}

describe('canonicalSchedule', () => {
  it('fills in defaults', () => {
    expect(canonicalSchedule({ family: 'exponential', mean: 0.5 })).toEqual({ family: 'exponential', mean: 0.5, 'dead-time': 0 });
    expect(canonicalSchedule({ family: 'two-point', first: 1, second: 2 })).toEqual({
      family: 'two-point',
      first: 1,
      second: 2,
      weight: 0.5,
      'dead-time': 0,
    });
  });
  it('is its own canonical form', () => {
    const spec = canonicalSchedule({ family: 'gamma', shape: 2, mean: 1, 'dead-time': 0.1 });
    expect(canonicalSchedule(spec)).toEqual(spec);
  });

  it.each<[unknown, string, string, string, RegExp]>([
    [{ family: 'poisson', mean: 1 }, 'schedule.unknown', 'family', '"poisson"', /fixed, exponential, gamma/],
    [{ mean: 1 }, 'schedule.unknown', 'family', 'undefined', /fixed/],
    [{ family: 'exponential' }, 'schedule.parameter', 'mean', 'undefined', /number/],
    [{ family: 'exponential', mean: 0 }, 'schedule.parameter', 'mean', '0', />0/],
    [{ family: 'exponential', mean: -1 }, 'schedule.parameter', 'mean', '-1', />0/],
    [{ family: 'exponential', mean: NaN }, 'schedule.parameter', 'mean', 'NaN', /number/],
    [{ family: 'exponential', mean: Infinity }, 'schedule.parameter', 'mean', 'Infinity', /number/],
    [{ family: 'exponential', mean: 1e13 }, 'schedule.parameter', 'mean', '10000000000000', /1000000000000/],
    [{ family: 'exponential', mean: '1' }, 'schedule.parameter', 'mean', '"1"', /number/],
    [{ family: 'exponential', mean: 1, rate: 2 }, 'schedule.parameter', 'rate', '"rate"', /mean, dead-time/],
    [{ family: 'fixed', interval: 0 }, 'schedule.parameter', 'interval', '0', />0/],
    [{ family: 'fixed', interval: 1, 'dead-time': -0.1 }, 'schedule.parameter', 'dead-time', '-0.1', />=0/],
    [{ family: 'gamma', mean: 1, shape: 0 }, 'schedule.parameter', 'shape', '0', /0.000001/],
    [{ family: 'uniform', low: 2, high: 1 }, 'schedule.parameter', 'high', '1', /> low/],
    [{ family: 'uniform', low: 1, high: 1 }, 'schedule.parameter', 'high', '1', /> low/],
    [{ family: 'uniform', low: -1, high: 1 }, 'schedule.parameter', 'low', '-1', />=0/],
    [{ family: 'two-point', first: 1, second: 2, weight: 1.2 }, 'schedule.parameter', 'weight', '1.2', /<=1/],
    [{ family: 'two-point', first: 0, second: 2, weight: 1 }, 'schedule.parameter', 'first', '0', /mean is > 0/],
    [{ family: 'truncated-normal', location: 1, scale: 0 }, 'schedule.parameter', 'scale', '0', />0/],
    [{ family: 'empirical', intervals: [] }, 'schedule.parameter', 'intervals', '[]', />=1/],
    [{ family: 'empirical', intervals: [0, 0] }, 'schedule.parameter', 'intervals', '[0,0]', /mean is > 0/],
    [{ family: 'empirical', intervals: [1, -2] }, 'schedule.parameter', 'intervals.1', '-2', />=0/],
    ['fixed', 'schedule.parameter', 'schedule', '"fixed"', /family/],
    [null, 'schedule.parameter', 'schedule', 'null', /family/],
  ])('refuses %j', (raw, code, where, found, allowed) => {
    const error = refusal(raw);
    expect([error.code, error.details.where, error.details.found]).toEqual([code, where, found]);
    expect(error.details.allowed).toMatch(allowed);
    expect(error.exit).toBe(2);
  });
});

describe('families', () => {
  it.each([...scheduleFamilies.values()])('$name says what it is', (family) => {
    expect(family.summary.length).toBeGreaterThan(10);
    expect(family.characteristic.length).toBeGreaterThan(5);
    expect(parameterNames(family)).toContain('dead-time');
    const shape = (family.parameters as unknown as { shape: Record<string, { description?: string }> }).shape;
    for (const [name, schema] of Object.entries(shape)) expect([name, schema.description ?? '']).not.toEqual([name, '']);
  });
  it('no variance means a fixed interval', () => {
    for (const spec of [
      { family: 'two-point', first: 0.5, second: 0.5, weight: 0.3 },
      { family: 'two-point', first: 0.5, second: 9, weight: 1 },
      { family: 'two-point', first: 9, second: 0.5, weight: 0 },
      { family: 'empirical', intervals: [0.5, 0.5, 0.5] },
      { family: 'fixed', interval: 0.2, 'dead-time': 0.3 },
    ]) {
      expect(buildSchedule(spec)).toMatchObject({ random: false, mean: 0.5, variance: 0 });
    }
  });
  it.each<[number[], number | null]>([
    [[0.3, 0.5, 0.9], 0.2],
    [[1, 2.5, 4, 7], 1.5],
    [[0.1, 0.2, 0.1 + Math.SQRT2 / 10], null],
  ])('empirical lattice of %j', (intervals, spacing) => {
    const { lattice } = buildSchedule({ family: 'empirical', intervals });
    if (spacing === null) expect(lattice).toBeNull();
    else expect(lattice).toBeCloseTo(spacing, 9);
  });
});
