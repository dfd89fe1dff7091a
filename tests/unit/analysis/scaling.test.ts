/** Scaling of boundaries: known laws with known scatter, published laws of finite chains, and the answers that are no fit. */
import { describe, expect, it } from 'vitest';
import type { Boundary } from '../../../src/analysis/boundary.js';
import { scalingOf, scalingsOf, type SizedBoundary } from '../../../src/analysis/scaling.js';
import { randomStream } from '../../../src/core/random.js';
import { TWO_LEVEL_QUESTION } from '../../support/two-level-rows.js';

const SIZES = [4, 8, 12, 16, 24, 32, 48, 64];

function sized(value: (size: number) => number, width = 0, sizes: readonly number[] = SIZES): SizedBoundary[] {
  return sizes.map((size) => ({ size, estimate: value(size), low: value(size) - width / 2, high: value(size) + width / 2 }));
}

describe('a law with scatter', () => {
  it('has errors that hold: the true limit lies within two of them about as often as it should', () => {
    const runs = 15;
    const within = Array.from({ length: runs }, (_, run) => {
      const noise = randomStream(run, 'scatter');
      const { fit } = scalingOf(sized((size) => 2 + 4 / size + 0.01 * noise.normal()));
      return fit !== null && Math.abs(fit.limit.value - 2) < 2 * fit.limit.error;
    }).filter(Boolean).length;
    // 95 % of a normal law; five free residuals and resampling of eight points leave about 85 %. Below 9 of 15 has a chance of 0.4 %.
    expect(within).toBeGreaterThanOrEqual(9);
  });

  it('grows its bracket error in proportion to the brackets and its scatter error with the scatter', () => {
    const wide = scalingOf(sized((size) => 2 + 4 / size, 0.02)).fit;
    const narrow = scalingOf(sized((size) => 2 + 4 / size, 0.002)).fit;
    const ratio = (wide?.limit.bracket_error ?? NaN) / (narrow?.limit.bracket_error ?? NaN);
    // Proportional as long as the fit answers linearly.
    expect(ratio).toBeGreaterThan(8);
    expect(ratio).toBeLessThan(13);
    // Resampled exponents are sought to 1e-5.
    expect(wide?.limit.error).toBeLessThan(1e-4);
    expect(wide?.scatter).toBeLessThan(1e-12);
  });

  it('gives the same answer again', () => {
    const boundaries = sized((size) => 1 + size ** -0.7 + 0.001 * Math.sin(size), 0.01);
    expect(scalingOf(boundaries)).toEqual(scalingOf(boundaries));
  });

  it('shows further corrections by the fit without the smallest size', () => {
    const { fit } = scalingOf(sized((size) => 2 + 3 / size + 8 / size ** 3));
    expect(Math.abs((fit?.limit_without_smallest ?? NaN) - 2)).toBeLessThan(Math.abs((fit?.limit.value ?? NaN) - 2));
  });
});

describe('published laws', () => {
  it('ground state energy of the open spin chain with nearest-neighbour hopping: −2/π a site at infinite length, exponent 1', () => {
    // Two soluble models of an antiferromagnetic chain, Ann. Phys. 16, 407 (1961), DOI 10.1016/0003-4916(61)90115-4 (from memory):
    // free fermions, levels −2 cos(πk/(L+1)), the lower half filled; −2/π a site as L → ∞ with a surface term of order 1/L.
    const energy = (length: number): number =>
      Array.from({ length: length / 2 }, (_, k) => -2 * Math.cos((Math.PI * (k + 1)) / (length + 1))).reduce(
        (sum, level) => sum + level,
        0,
      );
    const { fit } = scalingOf(sized((length) => energy(length) / length, 0, [32, 48, 64, 96, 128, 192, 256]));
    // The next correction is of relative order 1/L, which bends the exponent by about as much at the smallest length.
    expect(Math.abs((fit?.limit.value ?? NaN) + 2 / Math.PI)).toBeLessThan(1e-4);
    expect(Math.abs((fit?.exponent.value ?? NaN) - 1)).toBeLessThan(1 / 32);
  });
});

describe('answers that are no fit', () => {
  it('too few sizes', () => {
    for (const count of [0, 1, 2, 3]) {
      const found = scalingOf(sized((size) => 2 + 1 / size, 0, SIZES.slice(0, count)));
      expect(found).toMatchObject({ outcome: 'too few sizes', fit: null });
      expect(found.words).toContain(`${count} size(s)`);
    }
    expect(scalingOf(sized((size) => 2 + 1 / size, 0, SIZES.slice(0, 4))).outcome).toBe('fit');
  });

  it('no trend', () => {
    expect(scalingOf(sized(() => 2))).toMatchObject({ outcome: 'no trend', fit: null });
  });

  it('unsettled where no limit shows: growth with the size, and scatter alone', () => {
    expect(scalingOf(sized((size) => 0.1 * size))).toMatchObject({ outcome: 'unsettled', fit: null });
    expect(scalingOf(sized((size) => Math.log(size)))).toMatchObject({ outcome: 'unsettled', fit: null });
    // A change of 0.02 in brackets that are 1 wide.
    expect(scalingOf(sized((size) => 2 + 0.1 / size, 1))).toMatchObject({ outcome: 'unsettled', fit: null });
  });
});

describe('scalings of boundaries', () => {
  const boundary = (size: number, disorder: number, question: number): Boundary => ({
    questionOrdinal: question,
    question: TWO_LEVEL_QUESTION,
    at: { size, disorder },
    outcome: size === 48 ? 'no crossing' : 'bracket',
    words: '',
    bracket: size === 48 ? null : { low: 0, high: 9, estimate: 2 + disorder + (question + 3) / size, value_low: 0, value_high: 1 },
    candidates: 1,
    used: 9,
    left_out: { doubtful: 0, failed: 0, missing: 0, undefined: 0 },
  });

  it('one for each question and place; sizes without a bracket are left out and counted', () => {
    const boundaries = SIZES.flatMap((size) => [0, 1].flatMap((question) => [0, 1].map((disorder) => boundary(size, disorder, question))));
    const found = scalingsOf(boundaries);
    expect(found.map(({ questionOrdinal, at }) => [questionOrdinal, at])).toEqual([
      [0, { disorder: 0 }],
      [0, { disorder: 1 }],
      [1, { disorder: 0 }],
      [1, { disorder: 1 }],
    ]);
    for (const { sizes, left_out } of found) {
      expect(sizes.map(({ size }) => size)).toEqual(SIZES.filter((size) => size !== 48));
      expect(left_out).toBe(1);
    }
  });

  it('a sweep of words for sizes or of one size has too few', () => {
    expect(scalingsOf([boundary(4, 0, 0)])).toMatchObject([{ outcome: 'too few sizes', left_out: 0 }]);
    expect(scalingsOf([])).toEqual([]);
  });
});
