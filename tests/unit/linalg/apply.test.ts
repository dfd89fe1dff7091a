import { Matrix } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import { applyMatrix, isComplexPair } from '../../../src/linalg/apply.js';
import { densify } from '../../../src/linalg/elements.js';
import type { HermitianMatrix, StateVector } from '../../../src/linalg/matrix.js';
import { zeroVector } from '../../../src/linalg/vector.js';
import { densePlanes } from '../../support/exact-spectrum.js';
import { dimer, randomDense, randomState, ring } from '../../support/matrices.js';

/** (A + iB)(x + iy) by ml-matrix. */
function expected(matrix: HermitianMatrix, { re, im }: StateVector): { re: number[]; im: number[] } {
  const planes = densePlanes(matrix);
  const x = Matrix.columnVector([...re]);
  const y = Matrix.columnVector([...(im ?? re.map(() => 0))]);
  return {
    re: planes.re.mmul(x).sub(planes.im.mmul(y)).to1DArray(),
    im: planes.re.mmul(y).add(planes.im.mmul(x)).to1DArray(),
  };
}

describe('applyMatrix', () => {
  const matrices: [string, HermitianMatrix][] = [
    ['tridiagonal', dimer(6, 0.4)],
    ['tridiagonal of one state', dimer(0, 1)],
    ['sparse real', ring(7)],
    ['sparse complex', ring(7, 1, 0.3)],
    ['dense real', randomDense(7, false, 1)],
    ['dense complex', randomDense(7, true, 2)],
  ];
  for (const [name, matrix] of matrices) {
    for (const complex of [false, true]) {
      it(`is the product by ml-matrix: ${name}, ${complex ? 'complex' : 'real'} vector`, () => {
        const x = randomState(matrix.dimension, complex, 5);
        const y = zeroVector(matrix.dimension, isComplexPair(matrix, x));
        y.re.fill(NaN);
        y.im?.fill(NaN);
        applyMatrix(matrix, x, y);
        const { re, im } = expected(matrix, x);
        re.forEach((value, k) => expect(y.re[k]).toBeCloseTo(value, 14));
        im.forEach((value, k) => expect(y.im?.[k] ?? 0).toBeCloseTo(value, 14));
      });
    }
  }

  it('clears an imaginary plane that is not needed', () => {
    const y = zeroVector(7, true);
    y.im!.fill(1);
    applyMatrix(ring(7), randomState(7, false, 1), y);
    expect(y.im).toEqual(new Float64Array(7));
  });

  it('densify keeps every element', () => {
    for (const [, matrix] of matrices) {
      const dense = densify(matrix);
      const planes = densePlanes(matrix);
      expect([...dense.re]).toEqual(planes.re.to1DArray());
      if (dense.im !== null) expect([...dense.im]).toEqual(planes.im.to1DArray());
    }
  });
});
