/**
 * Random streams. Every check draws from fixed seeds, so it gives the same result each time; the bounds are quantiles of the exact
 * distribution of the statistic, wide enough that a sound generator misses one with probability below 1e-6.
 * Closed forms: moments of the uniform and normal distributions; the Kolmogorov distribution P(√n·D > c) ≈ 2 exp(−2c²).
 */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { randomStream, type RandomStream } from '../../../src/core/random.js';

const COUNT = 100_000;
const draw = (stream: RandomStream, kind: 'uniform' | 'normal', count = COUNT): number[] =>
  Array.from({ length: count }, () => stream[kind]());
const mean = (values: readonly number[]): number => values.reduce((sum, value) => sum + value, 0) / values.length;

/** Largest distance of the sample's distribution from `cdf`, times √n. */
function kolmogorov(values: readonly number[], cdf: (x: number) => number): number {
  const sorted = [...values].sort((a, b) => a - b);
  const distance = sorted.reduce((worst, x, i) => Math.max(worst, cdf(x) - i / sorted.length, (i + 1) / sorted.length - cdf(x)), 0);
  return distance * Math.sqrt(sorted.length);
}

/** Normal distribution function by its power series, good to 1e-15 for |x| < 6. */
function normalCdf(x: number): number {
  if (Math.abs(x) > 6) return x > 0 ? 1 : 0;
  let term = x;
  let sum = x;
  for (let k = 1; k < 200; k += 1) {
    term *= -(x * x) / (2 * k);
    sum += term / (2 * k + 1);
  }
  return 0.5 + sum / Math.sqrt(2 * Math.PI);
}

/** P(√n·D > 2.7) ≈ 2 exp(−14.6) ≈ 1e-6. */
const KOLMOGOROV_BOUND = 2.7;

/** Standard deviations; two-sided tail of the normal distribution 1e-6. */
const DEVIATIONS = 4.9;

describe('random streams', () => {
  it('give the same numbers for the same seed and path', () => {
    fc.assert(
      fc.property(fc.integer(), fc.array(fc.oneof(fc.string(), fc.nat())), (seed, path) => {
        expect(draw(randomStream(seed, ...path), 'uniform', 8)).toEqual(draw(randomStream(seed, ...path), 'uniform', 8));
        expect(draw(randomStream(seed, ...path), 'normal', 8)).toEqual(draw(randomStream(seed, ...path), 'normal', 8));
      }),
    );
  });

  it('differ where seed or path differ, also where the joined labels read the same', () => {
    const paths: readonly [number, ...(string | number)[]][] = [
      [1],
      [2],
      [12],
      [1, 2],
      [1, '2'],
      [1, 'a', 'b'],
      [1, 'ab'],
      [1, 'a,b'],
      [1, 'b', 'a'],
      [-1],
      [1.5],
      [Number.MAX_SAFE_INTEGER],
      [Number.MAX_SAFE_INTEGER - 1],
    ];
    const firsts = paths.map(([seed, ...path]) => draw(randomStream(seed, ...path), 'uniform', 2).join());
    expect(new Set(firsts).size).toBe(paths.length);
  });

  it.each(['uniform', 'normal'] as const)('are independent over paths: %s draws of neighbouring realisations are uncorrelated', (kind) => {
    const [a, b] = [1, 2].map((realisation) => draw(randomStream(7, 'disorder', realisation), kind));
    const [meanA, meanB] = [mean(a), mean(b)];
    const covariance = mean(a.map((value, i) => (value - meanA) * (b[i] - meanB)));
    const variance = kind === 'uniform' ? 1 / 12 : 1;
    expect(Math.abs(covariance / variance) * Math.sqrt(COUNT)).toBeLessThan(DEVIATIONS);
  });

  it('the first numbers of many streams are uniform and uncorrelated with their label', () => {
    const firsts = Array.from({ length: 20_000 }, (_, i) => randomStream(3, 'draw', i).uniform());
    expect(kolmogorov(firsts, (x) => x)).toBeLessThan(KOLMOGOROV_BOUND);
    const lag = mean(firsts.slice(1).map((value, i) => (value - 0.5) * (firsts[i] - 0.5))) * 12;
    expect(Math.abs(lag) * Math.sqrt(firsts.length - 1)).toBeLessThan(DEVIATIONS);
  });

  it('uniform draws lie in [0, 1) on multiples of 2⁻⁵³ and follow the uniform distribution', () => {
    const values = draw(randomStream(11), 'uniform');
    expect(values.every((value) => value >= 0 && value < 1 && Number.isInteger(value * 2 ** 53))).toBe(true);
    // The last bits are drawn too: about half of the numerators are odd.
    const odd = values.filter((value) => (value * 2 ** 53) % 2 === 1).length;
    expect(Math.abs(odd - COUNT / 2) / Math.sqrt(COUNT / 4)).toBeLessThan(DEVIATIONS);
    expect(kolmogorov(values, (x) => x)).toBeLessThan(KOLMOGOROV_BOUND);
    // E x^k = 1/(k+1), var x^k = 1/(2k+1) − 1/(k+1)²
    for (const k of [1, 2, 3, 4]) {
      const deviation = Math.sqrt((1 / (2 * k + 1) - 1 / (k + 1) ** 2) / COUNT);
      expect(Math.abs(mean(values.map((value) => value ** k)) - 1 / (k + 1)) / deviation).toBeLessThan(DEVIATIONS);
    }
  });

  it('normal draws follow the normal distribution, pairs of them are independent', () => {
    const values = draw(randomStream(13, 'noise'), 'normal');
    expect(kolmogorov(values, normalCdf)).toBeLessThan(KOLMOGOROV_BOUND);
    // E x^k = 0, 1, 0, 3 and var x^k = 1, 2, 15, 96
    for (const [k, expected, variance] of [
      [1, 0, 1],
      [2, 1, 2],
      [3, 0, 15],
      [4, 3, 96],
    ] as const) {
      expect(Math.abs(mean(values.map((value) => value ** k)) - expected) / Math.sqrt(variance / COUNT)).toBeLessThan(DEVIATIONS);
    }
    // Both members of a Box–Muller pair share a radius; their squares must still be uncorrelated: var((x²−1)(y²−1)) = 4.
    const pairs = values.filter((_, i) => i % 2 === 0).map((value, i) => (value ** 2 - 1) * (values[2 * i + 1] ** 2 - 1));
    expect(Math.abs(mean(pairs)) / Math.sqrt(4 / pairs.length)).toBeLessThan(DEVIATIONS);
  });

  it('uniform and normal draws of one stream may alternate', () => {
    const stream = randomStream(17);
    const values = Array.from({ length: COUNT / 4 }, () => [stream.normal(), stream.uniform()] as const);
    expect(
      kolmogorov(
        values.map(([normal]) => normal),
        normalCdf,
      ),
    ).toBeLessThan(KOLMOGOROV_BOUND);
    expect(
      kolmogorov(
        values.map(([, uniform]) => uniform),
        (x) => x,
      ),
    ).toBeLessThan(KOLMOGOROV_BOUND);
  });
});
