/** answer(): every field of awkward measures, flags with reasons, and what a budget can and cannot show. */
import { describe, expect, it } from 'vitest';
import { WindrowError } from '../../../src/core/errors.js';
import { CELL_FIELDS } from '../../../src/sweep/fields.js';
import { answer } from '../../../src/statistics/answer.js';
import { answerCost } from '../../../src/statistics/cost.js';
import type { CellFields, Question } from '../../../src/statistics/types.js';
import { measureOf, pathMiddle, pointOf, ring, twoLevel } from '../../support/reference-measure.js';

const question = (schedule: Question['schedule'], changes: Partial<Question> = {}): Question => ({
  schedule,
  resolution: { energy: 'auto', weight: 'auto' },
  budget: 200,
  detector: { efficiency: 1 },
  sampling: null,
  ...changes,
});
const SCHEDULES: readonly Question['schedule'][] = [
  { family: 'fixed', interval: 0.9 },
  { family: 'exponential', mean: 0.9 },
  { family: 'two-point', first: 0.5, second: 1.3 },
  { family: 'truncated-normal', location: 0.9, scale: 0.2 },
];

/** Numbers or null, never NaN or infinite, in the ranges every statistic has. */
function sound(fields: CellFields, budget: number): void {
  for (const { name, nullable } of CELL_FIELDS) {
    const value = fields[name];
    if (value === null) expect([name, nullable]).toEqual([name, true]);
    else expect([name, Number.isFinite(value)]).toEqual([name, true]);
  }
  expect(fields.detection_probability).toBeGreaterThanOrEqual(0);
  expect(fields.detection_probability).toBeLessThanOrEqual(1);
  expect(fields.detected_in_budget).toBeLessThanOrEqual(fields.detection_probability);
  expect(fields.capped_mean).toBeGreaterThanOrEqual(1 - 1e-12);
  expect(fields.capped_mean).toBeLessThanOrEqual(budget * (1 + 1e-12));
  expect(fields.flags.length).toBe(fields.flag_reasons.length);
}

describe('measures at the edge', () => {
  const cases = {
    'one level': measureOf([{ energy: 2, weight: 1 }]),
    'a weight at 1e-30': measureOf([
      { energy: 0, weight: 1e-30 },
      { energy: 1, weight: 1 },
    ]),
    'a denormal weight': measureOf([
      { energy: 0, weight: 5e-324 },
      { energy: 1, weight: 1 },
    ]),
    'a weight that has underflowed': measureOf([
      { energy: 0, weight: 0 },
      { energy: 1, weight: 0.5 },
      { energy: 2, weight: 0.5 },
    ]),
    'a doublet at rounding': measureOf([
      { energy: 1, weight: 0.25 },
      { energy: 1 + 4e-16, weight: 0.25 },
      { energy: 3, weight: 0.5 },
    ]),
    'a doublet at 1e-13': measureOf([
      { energy: 1, weight: 0.25 },
      { energy: 1 + 1e-13, weight: 0.25 },
      { energy: 3, weight: 0.5 },
    ]),
    'a dark transition': measureOf([
      { energy: 0, weight: 0.5, overlap: 0 },
      { energy: 1, weight: 0.5, overlap: 0 },
    ]),
    'a transition forbidden up to rounding': measureOf([
      { energy: 0, weight: 0.5, overlap: 1e-17 },
      { energy: 1, weight: 0.5, overlap: [-2e-17, 1e-17] },
    ]),
    'a transition carried by a weak level': measureOf([
      { energy: 0, weight: 1e-22, overlap: 1e-12 },
      { energy: 1, weight: 1, overlap: -1e-12 },
    ]),
    'energies far from zero': measureOf([
      { energy: 1e9, weight: 0.4 },
      { energy: 1e9 + 1, weight: 0.6 },
    ]),
    'a width of 1e-9': measureOf([
      { energy: 0, weight: 0.4 },
      { energy: 1e-9, weight: 0.6 },
    ]),
  };
  for (const [name, measure] of Object.entries(cases)) {
    it.each(SCHEDULES)(`${name}, %j`, (schedule) => {
      for (const budget of [1, 7, 200]) {
        for (const efficiency of [1, 0.3])
          sound(answer(pointOf(measure), question(schedule, { budget, detector: { efficiency } })), budget);
      }
    });
  }

  it('one level: detected at once', () => {
    expect(answer(pointOf(cases['one level']), question({ family: 'fixed', interval: 0.9 }))).toMatchObject({
      recurrent_weight: 1,
      decaying_weight: 0,
      decay_rate: null,
      settling_measurements: 1,
      winding_number: 1,
      winding_low: 1,
      winding_high: 1,
      mean_measurements: 1,
      variance_measurements: 0,
      mean_time: 0.9,
      capped_mean: 1,
      median_measurements: 1,
      p90_measurements: 1,
      flags: [],
    });
  });
  it('dark transitions: zeros and nulls', () => {
    for (const name of ['a dark transition', 'a transition forbidden up to rounding'] as const) {
      expect(answer(pointOf(cases[name]), question({ family: 'exponential', mean: 1 }))).toMatchObject({
        detection_probability: 0,
        mean_measurements: null,
        variance_measurements: null,
        mean_time: null,
        median_measurements: null,
        p90_measurements: null,
        capped_mean: 200,
      });
    }
  });
  it('no bright level is an error', () => {
    const dark = measureOf([{ energy: 0, weight: 0 }]);
    expect(() => answer(pointOf(dark), question({ family: 'fixed', interval: 1 }))).toThrow(WindrowError);
  });
});

describe('flags', () => {
  const reasons = (fields: CellFields): Record<string, string> =>
    Object.fromEntries(fields.flags.map((flag, k) => [flag, fields.flag_reasons[k]]));
  it('resolution-sensitive names the three numbers', () => {
    const measure = measureOf([
      { energy: 0, weight: 0.5 },
      { energy: 0.9, weight: 0.5 },
    ]);
    const fields = answer(pointOf(measure), question({ family: 'exponential', mean: 1 }, { resolution: { energy: 1, weight: 0.01 } }));
    expect([fields.winding_low, fields.winding_number, fields.winding_high]).toEqual([1, 1, 2]);
    expect(reasons(fields)['resolution-sensitive']).toMatch(/1, 1, 2/);
  });
  it('a doublet as close as its rounding: the mean stays a count, the variance is withheld with its reason', () => {
    const measure = measureOf([
      { energy: 1, weight: 0.25 },
      { energy: 1 + 1e-13, weight: 0.25 },
      { energy: 3, weight: 0.5 },
    ]);
    const fields = answer(pointOf(measure), question({ family: 'exponential', mean: 1 }));
    expect(fields).toMatchObject({ mean_measurements: 3, variance_measurements: null, winding_number: 2 });
    expect(reasons(fields)['underresolved']).toMatch(/variance/);
  });
  it('intervals too long for the energies: doubtful', () => {
    const fields = answer(pointOf(ring(6)), question({ family: 'fixed', interval: 1e11 }));
    expect(reasons(fields)['doubtful']).toMatch(/phases/);
  });
  it('a transition through a level too weak to be known: no mean', () => {
    // Amplitude 1e-13 in a level of weight 1e-24: its part of the mean, 1e-26/1e-24, hangs on digits that rounding has taken.
    const measure = measureOf([
      { energy: 0, weight: 1e-24, overlap: 1e-25 },
      { energy: 1, weight: 0.5, overlap: 0.3 },
      { energy: 2, weight: 0.5, overlap: -0.3 },
    ]);
    const fields = answer(pointOf(measure), question({ family: 'exponential', mean: 1 }));
    expect(fields.mean_measurements).toBeNull();
    expect(fields.flags).toContain('underresolved');
  });
});

describe('budget, detector, resolution, sampling', () => {
  it('auto resolution is what the budget can show', () => {
    expect(answer(pointOf(ring(6)), question({ family: 'uniform', low: 0, high: 1 }, { budget: 400 }))).toMatchObject({
      resolution_energy: 1 / 200,
      resolution_weight: 1 / 400,
    });
  });
  it('capped mean: E[min(n, K)] of the geometric law (closed form)', () => {
    const a = 2 / 5;
    for (const budget of [1, 2, 10, 1000]) {
      const fields = answer(pointOf(twoLevel(1, true)), question({ family: 'exponential', mean: 1 }, { budget }));
      expect(Math.abs(fields.capped_mean - (1 - (1 - a) ** budget) / a)).toBeLessThan(1e-12);
      expect(Math.abs(fields.detected_in_budget - (1 - (1 - a) ** budget))).toBeLessThan(1e-12);
    }
  });
  it('undetected runs count the whole budget', () => {
    const fields = answer(pointOf(ring(6, 1)), question({ family: 'exponential', mean: 1 }, { budget: 5000 }));
    expect(Math.abs(fields.capped_mean - (5000 / 2 + 21 / 8))).toBeLessThan(1e-8);
  });
  it('median where half is reached exactly', () => {
    // Erlang 2, g<τ> = 1: F_1 = 1/2.
    expect(answer(pointOf(twoLevel(1)), question({ family: 'gamma', mean: 1, shape: 2 })).median_measurements).toBe(1);
  });
  it('return with efficiency η: mean (number of levels)/η', () => {
    for (const schedule of SCHEDULES) {
      const fields = answer(pointOf(ring(6)), question(schedule, { detector: { efficiency: 0.25 } }));
      expect(fields.mean_measurements).toBe(16);
      expect(fields.mean_time).toBeCloseTo(16 * 0.9, 1);
    }
  });
  it('settling: exponential, two levels, |χ|^k cos leaves the band for good', () => {
    // <|u|²> − 1/2 = Re χ(2)^k/2, χ(2) = 1/(1 + 2i).
    const deviation = (k: number): number => 0.5 * 5 ** (-k / 2) * Math.cos(k * Math.atan(2));
    const last = Array.from({ length: 50 }, (_, i) => i + 1).filter((k) => Math.abs(deviation(k)) > 0.01);
    expect(answer(pointOf(twoLevel(1)), question({ family: 'exponential', mean: 1 })).settling_measurements).toBe(Math.max(...last) + 1);
    expect(answer(pointOf(twoLevel(1)), question({ family: 'fixed', interval: 0.3 })).settling_measurements).toBeNull();
  });
  it('samples are reported with draws and seed', () => {
    const fields = answer(pointOf(ring(3)), question({ family: 'exponential', mean: 1 }, { sampling: { draws: 8, seed: 3 } }));
    expect(fields).toMatchObject({ sampled_draws: 8, sampled_seed: 3 });
    expect(fields.sampled_winding).toBeGreaterThan(0.9);
    expect(answer(pointOf(ring(3)), question({ family: 'exponential', mean: 1 })).sampled_winding).toBeNull();
  });
  it('the same question gives the same answer', () => {
    const asked = question({ family: 'gamma', mean: 1, shape: 2 }, { sampling: { draws: 4, seed: 3 } });
    expect(answer(pointOf(ring(7, 2, 1, 0.2)), asked)).toEqual(answer(pointOf(ring(7, 2, 1, 0.2)), asked));
  });
});

describe('many levels', () => {
  it('a fixed interval over 3000 levels needs no n² memory', () => {
    const measure = pathMiddle(2999);
    const fields = answer(pointOf(measure), question({ family: 'fixed', interval: 0.3 }));
    expect(fields.mean_measurements).toBe(measure.energies.length);
    expect(answerCost(measure.energies.length, question({ family: 'fixed', interval: 0.3 })).bytes).toBeLessThan(
      8 * 40 * measure.energies.length,
    );
  });
});

describe('cost', () => {
  it('grows with levels, budget and draws', () => {
    const base = question({ family: 'exponential', mean: 1 });
    const flops = (n: number, q: Question): number => answerCost(n, q).flops;
    expect(flops(20, base)).toBeGreaterThan(flops(10, base));
    expect(flops(20, { ...base, budget: 400 })).toBeGreaterThan(flops(20, base));
    expect(flops(20, { ...base, sampling: { draws: 10, seed: 1 } })).toBeGreaterThan(flops(20, base));
    expect(flops(20, question({ family: 'fixed', interval: 1 }))).toBeLessThan(flops(20, base));
    expect(answerCost(1000, base).bytes).toBeGreaterThan(6 * 8 * 499_000);
  });
});
