/**
 * y = H x for every storage kind, on split real and imaginary planes. Nothing is checked: the planes have the matrix's length.
 *
 * A real matrix acts on the two planes separately, so a real vector stays in one plane. `y` must not share memory with `x`.
 */
import type { DenseMatrix, HermitianMatrix, SparseMatrix, StateVector, TridiagonalMatrix } from './matrix.js';

/** True where H x needs an imaginary plane. */
export function isComplexPair(matrix: HermitianMatrix, x: StateVector): boolean {
  return x.im !== null || (matrix.kind !== 'tridiagonal' && matrix.im !== null);
}

/**
 * Overwrites `y` with H x.
 * @param y an imaginary plane exactly where `isComplexPair(matrix, x)`; one that is not needed is set to zero
 */
export function applyMatrix(matrix: HermitianMatrix, x: StateVector, y: StateVector): void {
  if (matrix.kind === 'tridiagonal' || matrix.im === null) {
    applyReal(matrix, x.re, y.re);
    if (y.im !== null && x.im !== null) applyReal(matrix, x.im, y.im);
    else y.im?.fill(0);
    return;
  }
  const yIm = y.im as Float64Array;
  const n = matrix.dimension;
  const rowStart = matrix.kind === 'sparse' ? matrix.rowStart : null;
  const column = matrix.kind === 'sparse' ? matrix.column : null;
  const { re, im } = matrix;
  for (let i = 0; i < n; i += 1) {
    const from = rowStart === null ? i * n : rowStart[i];
    const to = rowStart === null ? from + n : rowStart[i + 1];
    let sumRe = 0;
    let sumIm = 0;
    for (let k = from; k < to; k += 1) {
      const j = column === null ? k - from : column[k];
      const xRe = x.re[j];
      const xIm = x.im === null ? 0 : x.im[j];
      sumRe += re[k] * xRe - im[k] * xIm;
      sumIm += re[k] * xIm + im[k] * xRe;
    }
    y.re[i] = sumRe;
    yIm[i] = sumIm;
  }
}

function applyReal(matrix: HermitianMatrix, x: Float64Array, y: Float64Array): void {
  if (matrix.kind === 'tridiagonal') applyTridiagonal(matrix, x, y);
  else if (matrix.kind === 'sparse') applySparse(matrix, x, y);
  else applyDense(matrix, x, y);
}

function applyTridiagonal(matrix: TridiagonalMatrix, x: Float64Array, y: Float64Array): void {
  const { dimension: n, diagonal, offDiagonal } = matrix;
  for (let i = 0; i < n; i += 1) y[i] = diagonal[i] * x[i];
  for (let i = 0; i + 1 < n; i += 1) {
    y[i] += offDiagonal[i] * x[i + 1];
    y[i + 1] += offDiagonal[i] * x[i];
  }
}

function applySparse(matrix: SparseMatrix, x: Float64Array, y: Float64Array): void {
  const { dimension: n, rowStart, column, re } = matrix;
  for (let i = 0; i < n; i += 1) {
    let sum = 0;
    for (let k = rowStart[i]; k < rowStart[i + 1]; k += 1) sum += re[k] * x[column[k]];
    y[i] = sum;
  }
}

function applyDense(matrix: DenseMatrix, x: Float64Array, y: Float64Array): void {
  const { dimension: n, re } = matrix;
  for (let i = 0; i < n; i += 1) {
    let sum = 0;
    for (let j = 0, k = i * n; j < n; j += 1, k += 1) sum += re[k] * x[j];
    y[i] = sum;
  }
}
