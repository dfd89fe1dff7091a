import { Matrix } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import { randomStream } from '../../../src/core/random.js';
import { applyMatrix } from '../../../src/linalg/apply.js';
import { groundState } from '../../../src/linalg/ground-state.js';
import type { DenseMatrix } from '../../../src/linalg/matrix.js';
import { levelsOf } from '../../support/exact-spectrum.js';

function randomHermitian(n: number, complex: boolean, seed: number): DenseMatrix {
  const stream = randomStream(seed, 'test');
  const re = new Float64Array(n * n);
  const im = complex ? new Float64Array(n * n) : null;
  for (let i = 0; i < n; i += 1) {
    for (let j = 0; j <= i; j += 1) {
      re[i * n + j] = re[j * n + i] = stream.normal();
      if (im === null || i === j) continue;
      im[i * n + j] = stream.normal();
      im[j * n + i] = -im[i * n + j];
    }
  }
  return { kind: 'dense', dimension: n, re, im };
}

describe('ground state', () => {
  it.each([
    [1, false],
    [2, true],
    [40, false],
    [40, true],
  ])('of a random matrix of %d rows, complex %s: level and gap as by ml-matrix, a small residual', (n, complex) => {
    const matrix = randomHermitian(n, complex, n);
    const levels = levelsOf(matrix);
    const { energy, gap, vector } = groundState(matrix);
    // Norm about 20: some hundred ulp; the gap is asked for to 1e-9 of the norm.
    expect(energy).toBeCloseTo(levels[0], 11);
    if (n === 1) expect(gap).toBe(Infinity);
    else expect(gap).toBeCloseTo(levels[1] - levels[0], 6);
    const image = { re: new Float64Array(n), im: complex ? new Float64Array(n) : null };
    applyMatrix(matrix, vector, image);
    for (let i = 0; i < n; i += 1) {
      expect(Math.abs(image.re[i] - energy * vector.re[i])).toBeLessThan(1e-12);
      if (image.im !== null && vector.im !== null) expect(Math.abs(image.im[i] - energy * vector.im[i])).toBeLessThan(1e-12);
    }
    expect(Math.hypot(...vector.re, ...(vector.im ?? []))).toBeCloseTo(1, 14);
  });

  it('counts multiplicity: a twofold lowest level has gap 0 to rounding', () => {
    const levels = [-2, -2, 0, 1, 3];
    const Q = new Matrix(5, 5);
    const stream = randomStream(9, 'test');
    // A reflection turns the diagonal matrix into a full one with the same levels.
    const v = Array.from({ length: 5 }, () => stream.normal());
    const square = v.reduce((sum, x) => sum + x * x, 0);
    for (let i = 0; i < 5; i += 1) for (let j = 0; j < 5; j += 1) Q.set(i, j, (i === j ? 1 : 0) - (2 * v[i] * v[j]) / square);
    const full = Q.mmul(Matrix.diag(levels)).mmul(Q);
    const { energy, gap } = groundState({ kind: 'dense', dimension: 5, re: Float64Array.from(full.to1DArray()), im: null });
    expect(energy).toBeCloseTo(-2, 13);
    expect(gap).toBeLessThan(1e-13);
  });

  it('restarts: a line of 400 sites, E_0 = −2 cos(π/401), gap by the next mode (closed form)', () => {
    const n = 400;
    const { energy, gap, vector } = groundState({
      kind: 'tridiagonal',
      dimension: n,
      diagonal: new Float64Array(n),
      offDiagonal: new Float64Array(n - 1).fill(-1),
    });
    expect(energy).toBeCloseTo(-2 * Math.cos(Math.PI / (n + 1)), 13);
    expect(gap).toBeCloseTo(2 * Math.cos(Math.PI / (n + 1)) - 2 * Math.cos((2 * Math.PI) / (n + 1)), 8);
    // The residual of 1e-15 over a gap of 2e-4.
    vector.re.forEach((x, i) => expect(x).toBeCloseTo(Math.sqrt(2 / (n + 1)) * Math.sin((Math.PI * (i + 1)) / (n + 1)), 9));
  });

  it('is zero for the zero matrix, with gap 0', () => {
    const { energy, gap } = groundState({ kind: 'dense', dimension: 3, re: new Float64Array(9), im: null });
    expect([Math.abs(energy), Math.abs(gap)]).toEqual([0, 0]);
  });
});
