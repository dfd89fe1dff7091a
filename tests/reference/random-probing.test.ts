/**
 * Random intervals: first-detection statistics and averaged transition probabilities against published results and closed forms.
 *
 * Sources, as named at each group:
 * - First-detection time of a quantum state under random probing, Phys. Rev. A 103, 022222 (2021), 10.1103/PhysRevA.103.022222
 * - Randomly repeated measurements on quantum systems: correlations and topological invariants of the quantum evolution,
 *   J. Phys. A 54, 395302 (2021)
 * - Probing many-body systems near spectral degeneracies, Symmetry 13, 1796 (2021), 10.3390/sym13101796
 * - Hitting time for the continuous quantum walk, Phys. Rev. A 78, 022324 (2008), 10.1103/PhysRevA.78.022324
 * Numbers without a source are closed forms or 25-digit values. Tolerance: 1e-12 relative, a few hundred roundings, unless said.
 */
import { describe, expect, it } from 'vitest';
import { buildSchedule } from '../../src/schedules/registry.js';
import type { ScheduleSpec } from '../../src/schedules/types.js';
import type { SpectralMeasure } from '../../src/spectral/types.js';
import { answer } from '../../src/statistics/answer.js';
import { correlationMatrix } from '../../src/statistics/correlation.js';
import { mergeResonant } from '../../src/statistics/levels.js';
import { detectionMoments, detectionProbability } from '../../src/statistics/moments.js';
import { detectionSeries } from '../../src/statistics/monitored.js';
import { transitionSeries } from '../../src/statistics/transition.js';
import { pointOf, ring, twoLevel } from '../support/reference-measure.js';

const exponential = (mean: number): ScheduleSpec => ({ family: 'exponential', mean });
const near = (value: number | null | undefined, expected: number, relative = 1e-12): void => {
  expect(value).not.toBeNull();
  expect(Math.abs((value as number) - expected)).toBeLessThanOrEqual(relative * Math.abs(expected));
};
function statistics(measure: SpectralMeasure, spec: ScheduleSpec) {
  const distribution = buildSchedule(spec);
  const levels = mergeResonant(measure, distribution).measure;
  return { probability: detectionProbability(levels), mean: NaN, variance: NaN, ...detectionMoments(levels, distribution) };
}

describe('two-level system, mean interval 1/g (random probing, 2021)', () => {
  const cases: readonly (readonly [string, ScheduleSpec, number])[] = [
    ['exponential', exponential(1), 2 / 5],
    ['uniform [0, 2]', { family: 'uniform', low: 0, high: 2 }, 0.594600311913491],
    ['Erlang 2', { family: 'gamma', mean: 1, shape: 2 }, 1 / 2],
    ['gamma 5/2', { family: 'gamma', mean: 1, shape: 2.5 }, 0.531196620008106],
    ['fixed', { family: 'fixed', interval: 1 }, 0.708073418273571],
  ];
  it.each(cases)('%s: F_1 = 1 − a, mean 2, variance 2(1−a)/a; transition 1/a, (1−a)/a²', (_, spec, a) => {
    near(detectionSeries(twoLevel(1), buildSchedule(spec), 1).detection[1], 1 - a);
    const back = statistics(twoLevel(1), spec);
    near(back.mean, 2);
    near(back.variance, (2 * (1 - a)) / a, 2e-12);
    const over = statistics(twoLevel(1, true), spec);
    near(over.mean, 1 / a);
    near(over.variance, (1 - a) / (a * a), 2e-12);
  });
  it('mean time of the transition under Poisson measurements: 2/λ + λ/(2g²) (hitting time, 2008)', () => {
    for (const rate of [0.2, 1, 2, 9]) {
      const fields = answer(pointOf(twoLevel(1, true)), {
        schedule: { family: 'exponential', mean: 1 / rate, 'dead-time': 0 },
        resolution: { energy: 'auto', weight: 'auto' },
        budget: 10,
        detector: { efficiency: 1 },
        sampling: null,
      });
      near(fields.mean_time, 2 / rate + rate / 2);
    }
  });
  it('best exponential interval 1/2 with mean time 2, best uniform π/2 with mean time π/2', () => {
    const time = (spec: ScheduleSpec): number => statistics(twoLevel(1, true), spec).mean * buildSchedule(spec).mean;
    near(time(exponential(0.5)), 2);
    near(time({ family: 'uniform', low: 0, high: Math.PI / 2 }), Math.PI / 2);
    expect(time(exponential(0.51))).toBeGreaterThan(2);
    expect(time(exponential(0.49))).toBeGreaterThan(2);
  });
  it('|χ| = 1 without χ = 1 leaves the mean at 2, and nothing decays', () => {
    const spec: ScheduleSpec = { family: 'two-point', first: 1, second: 1 + Math.PI, weight: 0.5 };
    const out = new Float64Array(2);
    buildSchedule(spec).complement(-2, out);
    expect(1 - out[0]).toBeCloseTo(-0.416146836547142, 14);
    expect(-out[1]).toBeCloseTo(0.909297426825682, 14);
    near(statistics(twoLevel(1), spec).mean, 2);
    const series = transitionSeries(twoLevel(1), buildSchedule(spec), 400);
    expect(Math.max(...series.slice(390))).toBeGreaterThan(0.9);
  });
  it('χ = 1 merges: both intervals a multiple of π/g', () => {
    const spec: ScheduleSpec = { family: 'two-point', first: Math.PI, second: 2 * Math.PI, weight: 0.4 };
    near(statistics(twoLevel(1), spec).mean, 1);
    expect(statistics(twoLevel(1, true), spec).probability).toBeLessThan(1e-25);
  });
});

describe('rings under random probing (2021)', () => {
  it.each([
    [3, 2, 3, 2.70264236728468],
    [4, 3, 9, 7.8105694691387],
    [5, 3, 19 / 2, 8.01321183642338],
    [6, 4, 83 / 4, 16.7356719583431],
    [7, 4, 41 / 2, 16.3369931419855],
    [8, 5, 39, 29.4845557531096],
  ])('%i sites, exponential: mean %i, variances', (sites, mean, atOne, atHalfPi) => {
    near(statistics(ring(sites), exponential(1)).mean, mean);
    near(statistics(ring(sites), exponential(1)).variance, atOne);
    near(statistics(ring(sites), exponential(Math.PI / 2)).variance, atHalfPi);
  });
  it('no exceptional interval: mean interval 2π/g on six sites still gives 4', () => {
    near(statistics(ring(6), exponential(2 * Math.PI)).mean, 4);
    near(statistics(ring(6), exponential(2 * Math.PI)).variance, 14.1709794974, 1e-11);
  });
  it.each([
    [1, 1 / 2, 21 / 4, 26, 15 / 2, 70.25, 4.48826098983608],
    [2, 1 / 2, 6, 213 / 8, 21 / 2, 86.25, 4.72548219753445],
    [3, 1, 41 / 8, 22.453125, 17 / 2, 69.75, 3.95400231183037],
  ])('six sites, distance %i: P, mean and variance', (r, probability, mean, variance, meanHalf, varianceHalf, meanUniform) => {
    const one = statistics(ring(6, r), exponential(1));
    near(one.probability, probability);
    near(one.mean, mean);
    near(one.variance, variance);
    const half = statistics(ring(6, r), exponential(0.5));
    near(half.mean, meanHalf);
    near(half.variance, varianceHalf);
    near(statistics(ring(6, r), { family: 'uniform', low: 0, high: 2 }).mean, meanUniform);
  });
  it('F_n on six sites, exponential mean 1', () => {
    const { detection } = detectionSeries(ring(6), buildSchedule(exponential(1)), 5);
    [0.458823529411765, 0.0888581314878893, 0.0706598819458579, 0.0703770500832126, 0.0636576446219584].forEach((value, k) =>
      near(detection[k + 1], value, 3e-14),
    );
  });
});

describe('averaged transition probability (randomly repeated measurements, 2021; near spectral degeneracies, 2021)', () => {
  it.each<[string, ScheduleSpec, number, readonly (readonly [number, number])[]]>([
    [
      'exponential',
      exponential(1),
      0,
      [
        [1, 0.458823529411765],
        [2, 0.230449826989619],
        [3, 0.196357419092204],
        [10, 0.27778541679862],
      ],
    ],
    [
      'uniform',
      { family: 'uniform', low: 0, high: 2 },
      0,
      [
        [1, 0.333288063354004],
        [2, 0.182455178435723],
        [3, 0.166411345198128],
        [10, 0.244624237906651],
      ],
    ],
    [
      'fixed',
      { family: 'fixed', interval: 1 },
      0,
      [
        [1, 0.0490560150010331],
        [2, 0.245334404619435],
        [3, 0.115558003966304],
        [10, 0.179228326046991],
      ],
    ],
    [
      'exponential, to the opposite site',
      exponential(1),
      3,
      [
        [1, 0.141176470588235],
        [2, 0.289550173010381],
        [3, 0.347642580907796],
        [10, 0.27777457040138],
      ],
    ],
  ])('six sites, %s', (_, spec, distance, values) => {
    const series = transitionSeries(ring(6, distance), buildSchedule(spec), 10);
    for (const [k, expected] of values) near(series[k], expected, 1e-13);
  });
  it('complex overlaps fix the sign of χ: three sites with phase 0.5 a bond, 0 → 1', () => {
    const series = transitionSeries(ring(3, 1, 1, 0.5), buildSchedule(exponential(1)), 2);
    near(series[1], 0.3844591747510289);
    near(series[2], 0.4440388843973);
    near(correlationMatrix(ring(3, 1, 1, 0.5), buildSchedule(exponential(1)), 3).re[2 * 3 + 2], 0.4440388843973);
  });
  it.each([
    [1, 1 / 9],
    [2, 1 / 9],
    [3, 5 / 18],
    [0, 5 / 18],
  ])('recurrent weight on six sites, distance %i', (r, expected) => {
    const fields = answer(pointOf(ring(6, r)), {
      schedule: { family: 'exponential', mean: 1, 'dead-time': 0 },
      resolution: { energy: 1e-9, weight: 1e-9 },
      budget: 50,
      detector: { efficiency: 1 },
      sampling: null,
    });
    near(fields.recurrent_weight, expected);
    near(fields.decaying_weight, (r === 0 ? 1 : 0) - expected);
    // Slowest pair: gap 1, |χ| = 1/√2.
    near(fields.decay_rate, Math.log(2) / 2);
  });
});
