/** Walks the stored elements of any matrix, so that code that is not hot is written once for all storage kinds. */
import type { DenseMatrix, HermitianMatrix } from './matrix.js';

/** Calls `visit` for every stored element (zeros of a dense matrix included), row by row, columns ascending. */
export function forEachElement(matrix: HermitianMatrix, visit: (row: number, column: number, re: number, im: number) => void): void {
  const n = matrix.dimension;
  if (matrix.kind === 'tridiagonal') {
    for (let i = 0; i < n; i += 1) {
      if (i > 0) visit(i, i - 1, matrix.offDiagonal[i - 1], 0);
      visit(i, i, matrix.diagonal[i], 0);
      if (i + 1 < n) visit(i, i + 1, matrix.offDiagonal[i], 0);
    }
    return;
  }
  const { re, im } = matrix;
  for (let i = 0; i < n; i += 1) {
    const from = matrix.kind === 'sparse' ? matrix.rowStart[i] : i * n;
    const to = matrix.kind === 'sparse' ? matrix.rowStart[i + 1] : from + n;
    for (let k = from; k < to; k += 1) {
      visit(i, matrix.kind === 'sparse' ? matrix.column[k] : k - from, re[k], im === null ? 0 : im[k]);
    }
  }
}

/** The same matrix in row-major dense storage, n² numbers a plane. */
export function densify(matrix: HermitianMatrix): DenseMatrix {
  if (matrix.kind === 'dense') return matrix;
  const n = matrix.dimension;
  const complex = matrix.kind === 'sparse' && matrix.im !== null;
  const re = new Float64Array(n * n);
  const im = complex ? new Float64Array(n * n) : null;
  forEachElement(matrix, (i, j, elementRe, elementIm) => {
    re[i * n + j] = elementRe;
    if (im !== null) im[i * n + j] = elementIm;
  });
  return { kind: 'dense', dimension: n, re, im };
}
