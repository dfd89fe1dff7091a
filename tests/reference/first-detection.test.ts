/**
 * Fixed intervals: first-detection statistics against published results and closed forms.
 *
 * Sources, as named at each group:
 * - Quantum walks: the first detected passage time problem, Phys. Rev. E 95, 032141 (2017), 10.1103/PhysRevE.95.032141
 * - Large fluctuations of the first detected quantum return time, Phys. Rev. Research 1, 033086 (2019), 10.1103/PhysRevResearch.1.033086
 * - Recurrence for discrete time unitary evolutions, Commun. Math. Phys. 320, 543 (2013), 10.1007/s00220-012-1645-2
 * - Dark states of quantum search cause imperfect detection, Phys. Rev. Research 2, 043107 (2020), 10.1103/PhysRevResearch.2.043107
 * Numbers without a source are closed forms or 60-digit values. Tolerance: 1e-12 relative, a few hundred roundings, unless said.
 */
import { describe, expect, it } from 'vitest';
import { buildSchedule } from '../../src/schedules/registry.js';
import type { SpectralMeasure } from '../../src/spectral/types.js';
import { answer } from '../../src/statistics/answer.js';
import { mergeResonant } from '../../src/statistics/levels.js';
import { detectionSeries } from '../../src/statistics/monitored.js';
import { detectionMoments, detectionProbability } from '../../src/statistics/moments.js';
import type { CellFields, Question } from '../../src/statistics/types.js';
import { measureOf, pointOf, ring, twoLevel } from '../support/reference-measure.js';

const fixed = (interval: number) => buildSchedule({ family: 'fixed', interval });
const near = (value: number | null | undefined, expected: number, relative = 1e-12): void => {
  expect(value).not.toBeNull();
  expect(Math.abs((value as number) - expected)).toBeLessThanOrEqual(relative * Math.max(Math.abs(expected), 1e-300));
};
function statistics(measure: SpectralMeasure, interval: number) {
  const { measure: levels } = mergeResonant(measure, fixed(interval));
  return { probability: detectionProbability(levels), ...detectionMoments(levels, fixed(interval)) };
}
function cell(measure: SpectralMeasure, interval: number, budget: number): CellFields {
  const question: Question = {
    schedule: { family: 'fixed', interval, 'dead-time': 0 },
    resolution: { energy: 'auto', weight: 'auto' },
    budget,
    detector: { efficiency: 1 },
    sampling: null,
  };
  return answer(pointOf(measure), question);
}

describe('two-level system (first detected passage time problem, 2017)', () => {
  it.each([
    [1, [0.291926581726429, 0.50136796566562, 0.146362636403898, 0.0427271441378581]],
    [0.3, [0.912667807454839, 0.00762691185474505, 0.00696083692012148, 0.00635293176993797]],
  ])('F_n of the return at gτ = %f', (tau, expected) => {
    const { detection } = detectionSeries(twoLevel(1), fixed(tau), 4);
    expected.forEach((value, k) => near(detection[k + 1], value));
  });
  it.each([
    [0.3, 20.9010625029913],
    [1, 0.824565854874784],
    [1.2, 0.302299107116254],
    [Math.PI / 4, 2],
  ])('return at gτ = %f: mean 2, variance 2cot²gτ', (tau, variance) => {
    const { mean, variance: found } = statistics(twoLevel(1), tau);
    near(mean, 2);
    near(found, variance);
  });
  it('gτ = π is exceptional: one phase, F_1 = 1', () => {
    const { mean, variance } = statistics(twoLevel(1), Math.PI);
    expect([mean, variance]).toEqual([1, 0]);
    near(detectionSeries(twoLevel(1), fixed(Math.PI), 1).detection[1], 1);
  });
  it('gτ = π/2 is not: F_2 = 1, mean 2, variance 0', () => {
    const { mean, variance } = statistics(twoLevel(1), Math.PI / 2);
    near(mean, 2);
    expect(variance).toBeLessThan(1e-14);
    near(detectionSeries(twoLevel(1), fixed(Math.PI / 2), 2).detection[2], 1);
  });
  it.each([
    [0.3, 11.4505312514957, 119.664134689983],
    [1, 1.41228292743739, 0.582260139693738],
  ])('transition at gτ = %f: 1/sin², cos²/sin⁴', (tau, mean, variance) => {
    const found = statistics(twoLevel(1, true), tau);
    expect(found.probability).toBeCloseTo(1, 14);
    near(found.mean, mean);
    near(found.variance, variance);
  });
  it('transition at gτ = π is never detected: probabilities 0, nulls, no error', () => {
    const fields = cell(twoLevel(1, true), Math.PI, 50);
    expect(fields).toMatchObject({ detection_probability: 0, mean_measurements: null, variance_measurements: null, mean_time: null });
    expect(fields).toMatchObject({ median_measurements: null, p90_measurements: null, capped_mean: 50 });
    expect(fields.detected_in_budget).toBe(0);
  });
  it.each([
    [0.2, 1.7, 0.361230238174568, 3.53663505609816],
    [0.05, 1, 0.0436712809425267, 43.7966873614741],
  ])('weights p = %f, phase %f: F_1 = 1 − a, variance 2(1−a)/a', (p, phase, a, variance) => {
    const measure = measureOf([
      { energy: 0, weight: p },
      { energy: phase, weight: 1 - p },
    ]);
    near(detectionSeries(measure, fixed(1), 1).detection[1], 1 - a);
    near(statistics(measure, 1).variance, variance);
  });
  it('quantiles of the transition at gτ = 0.3: 8 and 26 (geometric law)', () => {
    expect(cell(twoLevel(1, true), 0.3, 200)).toMatchObject({ median_measurements: 8, p90_measurements: 26 });
    expect(cell(twoLevel(1, true), 0.3, 25)).toMatchObject({ median_measurements: 8, p90_measurements: null });
  });
  it('budget 20 at gτ = 0.3: P(20) and Σ nF_n are those of the finite run', () => {
    const { detection } = detectionSeries(twoLevel(1), fixed(0.3), 20);
    near(cell(twoLevel(1), 0.3, 20).detected_in_budget, 0.984614335067725);
    near(
      detection.reduce((sum, value, n) => sum + n * value, 0),
      1.51611266422243,
    );
  });
});

describe('rings (first detected passage time problem, 2017; recurrence theorem, 2013)', () => {
  const variances: readonly (readonly [number, number, number])[] = [
    [3, 2, 0.261315059070556],
    [4, 3, 0.755511414953258],
    [5, 3, 1.55600194931324],
    [6, 4, 5.4344143048856],
    [7, 4, 6.07106659394319],
    [8, 5, 16.9983323201603],
    [9, 5, 15.8371522654771],
    [10, 6, 38.4040151071285],
    [12, 7, 72.6477656419055],
  ];
  it.each(variances)('return on %i sites at gτ = 1: mean %i, variance %f', (sites, mean, variance) => {
    const found = statistics(ring(sites), 1);
    near(found.mean, mean);
    near(found.variance, variance);
  });
  it.each([0.3, 1, 1.7, 2.9])('closed forms of the variance for 3 and 4 sites at gτ = %f', (x) => {
    near(statistics(ring(3), x).variance, -2 + 9 / 4 / Math.sin(1.5 * x) ** 2, 1e-11);
    near(statistics(ring(4), x).variance, -23 / 4 + 15 / 4 / Math.sin(x) ** 2 + 1 / Math.sin(2 * x) ** 2, 1e-11);
  });
  it.each([
    [1 / 2, 3],
    [2 / 3, 2],
    [1, 2],
    [4 / 3, 2],
    [3 / 2, 3],
    [2, 1],
  ])('six sites at gτ = %f π: exceptional, mean %i (table from memory)', (times, mean) => {
    near(statistics(ring(6), times * Math.PI).mean, mean);
    expect(cell(ring(6), times * Math.PI, 100).mean_measurements).toBe(mean);
    expect(cell(ring(6), times * Math.PI, 100).winding_number).toBe(mean);
  });
  it.each([
    [3, (2 * Math.PI) / 3, 1],
    [4, Math.PI / 2, 2],
    [5, (4 * Math.PI) / (5 + Math.sqrt(5)), 2],
    [8, Math.PI / 2, 4],
  ])('%i sites: smallest exceptional gτ %f', (sites, tau, below) => {
    expect(statistics(ring(sites), tau).mean).toBeCloseTo(below, 12);
    expect(statistics(ring(sites), tau * 0.99).mean).toBeCloseTo(Math.floor(sites / 2) + 1, 10);
  });
  it.each([3, 4, 5, 6, 7, 8])('transition probability 1/2, or 1 to the opposite site, on %i sites (dark states, 2020)', (sites) => {
    for (let r = 1; r < sites; r++) expect(statistics(ring(sites, r), 1).probability).toBeCloseTo(2 * r === sites ? 1 : 0.5, 13);
  });
  it.each([
    [1, 1 / 2, 1 / 6, 5 / 18],
    [2, 1 / 2, 1 / 2, 1],
    [3, 1 / 2, 2 / 3, 10 / 9],
    [3, 2 / 3, 1, 4 / 3],
    [2, 1, 1 / 2, 9 / 16],
  ])('six sites, distance %i at gτ = %f π: P = %f with merged phases, Σ nF_n = %f', (r, times, probability, sum) => {
    const found = statistics(ring(6, r), times * Math.PI);
    near(found.probability, probability, 1e-13);
    near((found.mean ?? NaN) * found.probability, sum);
  });
  it.each([
    [1, 2 / 3],
    [2, 2 / 3],
    [1, 1],
    [3, 1],
  ])('six sites, distance %i at gτ = %f π: dark', (r, times) => {
    expect(cell(ring(6, r), times * Math.PI, 30).detection_probability).toBe(0);
  });
  it('F_n on six sites at gτ = 1', () => {
    const back = [0.0490560150010331, 0.296337005349212, 0.0120260951992756, 0.428127354296203, 0.00604864142564659, 0.111355987156107];
    const across = [0.0665028753987689, 0.642159670465398, 0.0188960697563295, 0.144540980029869, 0.0083982093506553, 0.058624123645365];
    const return6 = detectionSeries(ring(6), fixed(1), 6).detection;
    const transition6 = detectionSeries(ring(6, 3), fixed(1), 6).detection;
    // 15 digits of values that are differences of order one.
    back.forEach((value, k) => expect(Math.abs(return6[k + 1] - value)).toBeLessThan(3e-15));
    across.forEach((value, k) => expect(Math.abs(transition6[k + 1] - value)).toBeLessThan(3e-15));
  });
  it('a transition with P < 1: conditional mean, not Σ nF_n', () => {
    const found = statistics(ring(6, 1), 1);
    near(found.mean, 2.09643877748972);
    near(statistics(ring(6, 3), 1).mean, 2.93450084738798);
  });
  it('budget near an exceptional interval, gτ = π/2 + 0.01: Σ nF_n creeps towards 4', () => {
    const { detection } = detectionSeries(ring(6), fixed(Math.PI / 2 + 0.01), 10000);
    for (const [count, expected] of [
      [10, 2.99494809],
      [100, 3.00313502],
      [1000, 3.33540099],
      [10000, 3.99992029],
    ] as const) {
      const sum = detection.slice(0, count + 1).reduce((total, value, n) => total + n * value, 0);
      expect(Math.abs(sum - expected)).toBeLessThan(1e-8);
    }
  });
});

describe('variance near degeneracies (large fluctuations, 2019)', () => {
  it.each([
    [0.1, 421.419549451841, 1.01140692],
    [0.01, 41698.0698206227, 1.000753676],
    [0.001, 4166968.18569953, 1.000072365],
  ])('two phases merging, distance %f', (delta, variance, ratio) => {
    const [a, b] = [0.2, 0.3];
    const energies = mergingPhases(delta);
    const measure = measureOf([a, b, 0.1, 0.4].map((weight, k) => ({ energy: energies[k], weight })));
    const found = statistics(measure, 1).variance ?? NaN;
    near(found / ((2 * (a + b) ** 3) / (a * b * delta * delta)), ratio, 2e-9);
    // The distance itself is known to 1e-16/distance.
    near(found, variance, 1e-12 / delta);
  });
  it.each([
    [1e-2, 194.401848145779],
    [1e-3, 1854.45264660492],
    [1e-4, 18454.8901607215],
  ])('a weak level p = %f', (p, variance) => {
    const rest = [0.5, 0.3, 0.2].map((share) => share * (1 - p));
    const measure = measureOf([p, ...rest].map((weight, k) => ({ energy: [0, 0.7, 1.9, 2.6][k], weight })));
    near(statistics(measure, 1).variance, variance);
  });
  it.each([
    [0.1, 13.4100541114214],
    [0.01, 13.4991000053891],
    [0.001, 13.499991000005],
  ])('short intervals, gτ = %f: τ² Var → 27/2 on six sites', (tau, expected) => {
    near((statistics(ring(6), tau).variance ?? NaN) * tau * tau, expected, 1e-11);
  });
  it.each([
    [0.01, 1666.28666471707],
    [0.001, 166666.228265823],
  ])('six sites at gτ = π/2 + %f: 1/(6ε²)', (epsilon, variance) => {
    near(statistics(ring(6), Math.PI / 2 + epsilon).variance, variance, 1e-12 / epsilon);
  });
});

/** Two phases at distance delta, two apart from them. */
function mergingPhases(delta: number): readonly number[] {
  return [0, delta, 1.3, 2.9];
}

describe('complete graph and hypercube', () => {
  // Complete graph, dark states of quantum search (2020): levels −(N−1) and 1, splitting N g.
  it.each([
    [4, 6.3641467778788, 4.1820733889394],
    [8, 3.26239795912287, 2.63119897956143],
  ])('complete graph of %i sites at gτ = 0.3', (sites, variance, mean) => {
    const levels = (overlap: readonly [number, number] | null) =>
      measureOf([
        { energy: -(sites - 1), weight: 1 / sites, ...(overlap === null ? {} : { overlap: overlap[0] }) },
        { energy: 1, weight: 1 - 1 / sites, ...(overlap === null ? {} : { overlap: overlap[1] }) },
      ]);
    near(statistics(levels(null), 0.3).variance, variance);
    const transition = statistics(levels([1 / sites, -1 / sites]), 0.3);
    near(transition.probability, 1 / (sites - 1));
    near(transition.mean, mean);
  });
  // Quantum walks with infinite hitting times, Phys. Rev. A 74, 042334 (2006), 10.1103/PhysRevA.74.042334.
  it.each([
    [2, 1.41589338028235, 1.87972342424186, 1.03059408004901],
    [3, 3.17938293370651, 2.01593621193528, 0.875100719793216],
    [4, 11.052667617185, 2.55039367998813, 5.11764119134803],
  ])('%i-cube at gτ = 0.9: return and antipode', (dimension, returnVariance, mean, variance) => {
    const binomial = (k: number): number => Array.from({ length: k }, (_, i) => (dimension - i) / (i + 1)).reduce((a, b) => a * b, 1);
    const levels = (antipode: boolean) =>
      measureOf(
        Array.from({ length: dimension + 1 }, (_, k) => {
          const weight = binomial(k) / 2 ** dimension;
          return { energy: 2 * k - dimension, weight, ...(antipode ? { overlap: k % 2 === 0 ? weight : -weight } : {}) };
        }),
      );
    near(statistics(levels(false), 0.9).mean, dimension + 1);
    near(statistics(levels(false), 0.9).variance, returnVariance);
    const across = statistics(levels(true), 0.9);
    near(across.probability, 1);
    near(across.mean, mean);
    near(across.variance, variance, 1e-11);
    near(statistics(levels(true), Math.PI / 2).mean, 1);
  });
});

describe('best interval for the two-level transition (closed form)', () => {
  it('mean time 1.38005… at tan x = 2x', () => {
    const fields = cell(twoLevel(1, true), 1.165561185207211, 100);
    near(fields.mean_measurements, 1.18402204638, 1e-11);
    near(fields.mean_time, 1.380050139689301);
  });
});
