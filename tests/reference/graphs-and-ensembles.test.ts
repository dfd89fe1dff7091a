/** Walks on graphs, analog search and random matrices: closed forms, and the statistics of the Gaussian ensembles within their errors. */
import { describe, expect, it } from 'vitest';
import { buildSchedule } from '../../src/schedules/registry.js';
import { spectralMeasure } from '../../src/spectral/measure.js';
import type { SpectralMeasure } from '../../src/spectral/types.js';
import { detectionMoments, detectionProbability } from '../../src/statistics/moments.js';
import { systemOf } from '../support/model-requests.js';
import type { Asked } from '../support/model-requests.js';

const measureOf = (model: string, asked: Asked): SpectralMeasure => spectralMeasure(systemOf(model, asked)).measure;
const statistics = (measure: SpectralMeasure, interval: number) => ({
  probability: detectionProbability(measure),
  ...detectionMoments(measure, buildSchedule({ family: 'fixed', interval })),
});
/** Sums of a few levels at the accuracy of a reduction. */
const near = (found: number | undefined, expected: number, tolerance = 1e-10): void =>
  expect(Math.abs((found ?? NaN) - expected)).toBeLessThan(tolerance * Math.max(1, Math.abs(expected)));

describe('complete graph', () => {
  // Dark states of quantum search cause imperfect detection, Phys. Rev. Research 2, 043107 (2020), DOI 10.1103/PhysRevResearch.2.043107
  it.each([
    [4, 0.3, 6.3641467778788, 4.1820733889394],
    [8, 0.3, 3.26239795912287, 2.63119897956143],
  ])('N = %d, gτ = %d: two levels; P = 1/(N − 1) between vertices', (size, interval, variance, mean) => {
    const back = measureOf('complete-graph', { size, prepared: 'first' });
    expect([...back.energies].map((energy) => Math.round(energy * 1e10) / 1e10)).toEqual([1 - size, 1]);
    near(back.weights[0], 1 / size);
    const returned = statistics(back, interval);
    near(returned.mean, 2);
    near(returned.variance, variance);
    const across = statistics(measureOf('complete-graph', { size, prepared: 'last', detected: 'first' }), interval);
    near(across.probability, 1 / (size - 1));
    near(across.mean, mean);
    const a = ((4 * (size - 1)) / size ** 2) * Math.sin((size * interval) / 2) ** 2;
    near(across.mean, 1 / a);
    near(returned.variance, (2 * (1 - a)) / a);
  });

  it('analog search: levels −(1 ± 1/√N) up to the constant 1/N, found with certainty at t = π√N/2', () => {
    // Analog analogue of a digital quantum computation, Phys. Rev. A 57, 2403 (1998), DOI 10.1103/PhysRevA.57.2403 (from memory)
    const size = 64;
    const search = measureOf('complete-graph', {
      size,
      coupling: 1 / size,
      parameters: { oracle: 1 },
      prepared: 'uniform',
      detected: 'first',
    });
    expect(search.energies).toHaveLength(2);
    near(search.energies[0], -1.125 + 1 / size);
    near(search.energies[1], -0.875 + 1 / size);
    const found = (t: number): number => {
      let re = 0;
      let im = 0;
      search.energies.forEach((energy, j) => {
        re += search.overlapRe[j] * Math.cos(energy * t);
        im -= search.overlapRe[j] * Math.sin(energy * t);
      });
      return re * re + im * im;
    };
    near(found((Math.PI * Math.sqrt(size)) / 2), 1);
    near(found(3), 0.14768438485116625);
  });
});

describe('hypercube', () => {
  // Quantum walks with infinite hitting times, Phys. Rev. A 74, 042334 (2006), DOI 10.1103/PhysRevA.74.042334
  it.each([
    [2, 1.41589338028235, 1.87972342424186, 1.03059408004901],
    [3, 3.17938293370651, 2.01593621193528, 0.875100719793216],
    [4, 11.052667617185, 2.55039367998813, 5.11764119134803],
  ])('n = %d, gτ = 0.9: n + 1 levels, binomial weights, the antipode always found', (size, variance, mean, across) => {
    const back = measureOf('hypercube', { size, prepared: 'origin' });
    expect(back.energies).toHaveLength(size + 1);
    let binomial = 1;
    for (let k = 0; k <= size; k += 1) {
      near(back.energies[k], 2 * k - size);
      near(back.weights[k], binomial / 2 ** size);
      binomial = (binomial * (size - k)) / (k + 1);
    }
    const returned = statistics(back, 0.9);
    near(returned.mean, size + 1);
    near(returned.variance, variance);
    const opposite = statistics(measureOf('hypercube', { size, prepared: 'origin', detected: 'antipode' }), 0.9);
    near(opposite.probability, 1);
    near(opposite.mean, mean);
    near(opposite.variance, across);
  });

  it('at gτ = π/2 the antipode is found at the first measurement', () => {
    const { energies, overlapRe } = measureOf('hypercube', { size: 3, prepared: 'origin', detected: 'antipode' });
    let re = 0;
    let im = 0;
    energies.forEach((energy, j) => {
      re += overlapRe[j] * Math.cos((energy * Math.PI) / 2);
      im -= overlapRe[j] * Math.sin((energy * Math.PI) / 2);
    });
    near(re * re + im * im, 1);
  });
});

describe('random matrices', () => {
  const SAMPLES = 40;
  const SIZE = 80;

  const sample = (ensemble: string, seed: number): Float64Array =>
    measureOf('random-matrix', { size: SIZE, parameters: { ensemble, seed }, prepared: 'first' }).energies;

  function meanAndError(values: readonly number[]): readonly [number, number] {
    const mean = values.reduce((a, b) => a + b, 0) / values.length;
    const variance = values.reduce((a, b) => a + (b - mean) ** 2, 0) / (values.length - 1);
    return [mean, Math.sqrt(variance / values.length)];
  }

  function middleRatio(energies: Float64Array): number {
    const middle = energies.slice(Math.floor(0.2 * energies.length), Math.ceil(0.8 * energies.length));
    const spacings = Array.from(middle.slice(1), (energy, j) => energy - middle[j]);
    const ratios = spacings.slice(1).map((s, j) => Math.min(s, spacings[j]) / Math.max(s, spacings[j]));
    return ratios.reduce((a, b) => a + b, 0) / ratios.length;
  }

  // Distribution of the ratio of consecutive level spacings in random matrix ensembles, Phys. Rev. Lett. 110, 084101 (2013),
  // DOI 10.1103/PhysRevLett.110.084101: mean ratios of large matrices.
  it.each([
    ['orthogonal', 0.5307, 1],
    ['unitary', 0.5996, 2],
    ['symplectic', 0.6744, 4],
  ])('%s: gap ratio and second moment within four standard errors', (ensemble, ratio, beta) => {
    const spectra = Array.from({ length: SAMPLES }, (_, seed) => sample(ensemble, seed));
    // Quaternion levels come in pairs: n distinct ones, each reached once.
    for (const energies of spectra) expect(energies).toHaveLength(SIZE);
    const [meanRatio, ratioError] = meanAndError(spectra.map(middleRatio));
    expect(Math.abs(meanRatio - ratio)).toBeLessThan(4 * ratioError);
    expect(ratioError).toBeLessThan(0.01);
    // tr H²/n = [n − 1 + 2/β]/n on average, by the definition of the elements.
    const [square, squareError] = meanAndError(
      spectra.map((energies) => energies.reduce((sum, energy) => sum + energy * energy, 0) / SIZE),
    );
    expect(Math.abs(square - (SIZE - 1 + 2 / beta) / SIZE)).toBeLessThan(4 * squareError);
  });

  it('a wide random diagonal makes the levels independent: 2 ln 2 − 1', () => {
    // Localization of interacting fermions at high temperature, Phys. Rev. B 75, 155111 (2007), DOI 10.1103/PhysRevB.75.155111 (from memory)
    const ratios = Array.from({ length: SAMPLES }, (_, realisation) => {
      const disorder = { strength: 1000, seed: 5, realisation };
      const { energies } = spectralMeasure(
        systemOf('random-matrix', { size: SIZE, coupling: 0.01, disorder, prepared: { uniform: { like: 'first' } } }),
      ).measure;
      return middleRatio(energies);
    });
    const [mean, error] = meanAndError(ratios);
    expect(Math.abs(mean - (2 * Math.LN2 - 1))).toBeLessThan(4 * error);
  });

  it('the seed names the matrix; a smaller one is the corner of a larger', () => {
    const build = (size: number, seed: number) =>
      systemOf('random-matrix', { size, coupling: Math.sqrt(size), parameters: { seed }, prepared: 'first' });
    const [small, large, other] = [build(3, 7), build(5, 7), build(3, 8)].map(({ matrix }) => (matrix.kind === 'dense' ? matrix.re : []));
    for (const [x, y] of [
      [0, 0],
      [1, 0],
      [2, 1],
      [2, 2],
    ]) {
      near(small[3 * x + y], large[5 * x + y], 1e-14);
      expect(small[3 * x + y]).not.toBe(other[3 * x + y]);
    }
  });
});
