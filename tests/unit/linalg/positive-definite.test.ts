import { CholeskyDecomposition, Matrix } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import { scalarSolver, vectorSolver, type WriteElements } from '../../../src/linalg/positive-definite.js';
import { randomState } from '../../support/matrices.js';

/** BBᵀ + 1 for a normal B. */
function positiveDefinite(n: number): Matrix {
  const b = new Matrix(Array.from({ length: n }, (_, i) => [...randomState(n, false, i).re]));
  return b.mmul(b.transpose()).add(Matrix.eye(n));
}

describe.each([
  ['on vectors', vectorSolver],
  ['in TypeScript', scalarSolver],
])('positive definite systems %s', (_, solver) => {
  it.each([1, 2, 3, 4, 5, 6, 7, 8, 9, 17, 60])('solves what ml-matrix solves, n = %i', (n) => {
    const matrix = positiveDefinite(n);
    // Either triangle may be given.
    const solve = solver(n, (set) => {
      for (let i = 0; i < n; i++)
        for (let j = i; j < n; j++)
          if ((i + j) % 2 === 0) set(i, j, matrix.get(i, j));
          else set(j, i, matrix.get(i, j));
    });
    for (const seed of [100, 101]) {
      const right = randomState(n, false, seed).re;
      const expected = new CholeskyDecomposition(matrix).solve(Matrix.columnVector(right)).to1DArray();
      // The condition number is below 10, so both are right to a few roundings.
      solve(right).forEach((x, k) => expect(Math.abs(x - expected[k])).toBeLessThan(1e-14));
    }
  });

  it('refuses a matrix that is not positive definite', () => {
    const write: WriteElements = (set) => {
      for (let i = 0; i < 5; i++) set(i, i, i === 2 ? -1 : 1);
    };
    expect(() => solver(5, write)).toThrow(expect.objectContaining({ code: 'internal.invariant' }));
  });
});
