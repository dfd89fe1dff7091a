import { describe, expect, it } from 'vitest';
import type { HermitianMatrix } from '../../../src/linalg/matrix.js';
import { validateMatrix, validateVector } from '../../../src/linalg/validate.js';
import { dimer, randomDense, ring } from '../../support/matrices.js';

const refuse = (matrix: HermitianMatrix, code: string, where = ''): void =>
  expect(() => validateMatrix(matrix)).toThrow(
    expect.objectContaining({ code, ...(where === '' ? {} : { details: expect.objectContaining({ where }) }) }),
  );

describe('validateMatrix', () => {
  it('lets Hermitian matrices of every storage pass, and rounding between the two triangles', () => {
    for (const matrix of [dimer(5, 1), ring(5, 1, 0.4), randomDense(6, true, 1)]) expect(() => validateMatrix(matrix)).not.toThrow();
    const matrix = randomDense(6, false, 2);
    matrix.re[1] *= 1 + Number.EPSILON;
    expect(() => validateMatrix(matrix)).not.toThrow();
  });

  it('names the pair of elements that differ', () => {
    const dense = randomDense(4, false, 3);
    dense.re[1 * 4 + 2] += 1e-6;
    refuse(dense, 'matrix.not-hermitian', 'elements (1, 2) and (2, 1)');
    const wrongPhase = ring(5, 1, 0.4);
    refuse({ ...wrongPhase, im: wrongPhase.im!.map(Math.abs) }, 'matrix.not-hermitian');
    const complexDiagonal = randomDense(3, true, 4);
    complexDiagonal.im![4] = 0.1;
    refuse(complexDiagonal, 'matrix.not-hermitian', 'elements (1, 1) and (1, 1)');
  });

  it('finds a mirror element that is not stored', () => {
    refuse(
      { kind: 'sparse', dimension: 2, rowStart: Int32Array.of(0, 1, 1), column: Int32Array.of(1), re: Float64Array.of(1), im: null },
      'matrix.not-hermitian',
    );
  });

  it('refuses numbers that are not finite', () => {
    const matrix = dimer(4, 1);
    matrix.offDiagonal[2] = NaN;
    refuse(matrix, 'matrix.not-finite', 'element (2, 3)');
  });

  it('refuses arrays that do not fit together', () => {
    const sparse = ring(4);
    refuse({ ...dimer(4, 1), dimension: 4 }, 'matrix.dimension');
    refuse({ ...randomDense(3, false, 1), dimension: 4 }, 'matrix.dimension');
    refuse({ ...sparse, dimension: 0 }, 'matrix.dimension');
    refuse({ ...sparse, re: sparse.re.slice(1) }, 'matrix.dimension');
    refuse({ ...sparse, rowStart: Int32Array.of(0, 4, 2, 6, 8) }, 'matrix.dimension');
    refuse({ ...sparse, rowStart: Int32Array.of(0, 2, 4, 6, 7) }, 'matrix.dimension');
    refuse({ ...sparse, column: sparse.column.slice().reverse() }, 'matrix.dimension');
  });
});

describe('validateVector', () => {
  it('checks length and numbers', () => {
    const im = Float64Array.of(0, Infinity);
    expect(() => validateVector({ re: new Float64Array(2), im: null }, 2)).not.toThrow();
    expect(() => validateVector({ re: new Float64Array(2), im: null }, 3)).toThrow(expect.objectContaining({ code: 'matrix.dimension' }));
    expect(() => validateVector({ re: new Float64Array(2), im }, 2)).toThrow(expect.objectContaining({ code: 'matrix.not-finite' }));
  });
});
