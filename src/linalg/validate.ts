/** Checks matrices and vectors that were not made by this program's builders. Every problem is one WindrowError that names the element. */
import { WindrowError } from '../core/errors.js';
import type { HermitianMatrix, SparseMatrix, StateVector } from './matrix.js';
import { forEachElement } from './elements.js';
import { normBound } from './norm.js';

/** An element may differ from its mirror image by this many units of rounding of the norm: what adding up the same terms in another order costs. */
const MIRROR_ULPS = 16;

/**
 * @param name how messages call the matrix
 * @throws WindrowError matrix.dimension for arrays that do not fit together, matrix.not-finite, matrix.not-hermitian
 */
export function validateMatrix(matrix: HermitianMatrix, name = 'the Hamiltonian'): void {
  checkShape(matrix, name);
  forEachElement(matrix, (row, column, re, im) => {
    if (Number.isFinite(re) && Number.isFinite(im)) return;
    throw new WindrowError('matrix.not-finite', `${name} has an element that is not a finite number`, {
      where: `element (${row}, ${column})`,
      found: `${re} + ${im}i`,
    });
  });
  if (matrix.kind === 'tridiagonal') return;
  const tolerance = MIRROR_ULPS * Number.EPSILON * normBound(matrix);
  const at = matrix.kind === 'sparse' ? sparseLookup(matrix) : (i: number, j: number) => i * matrix.dimension + j;
  forEachElement(matrix, (row, column, re, im) => {
    const mirror = at(column, row);
    const mirrorRe = mirror < 0 ? 0 : matrix.re[mirror];
    const mirrorIm = mirror < 0 || matrix.im === null ? 0 : matrix.im[mirror];
    if (Math.abs(re - mirrorRe) <= tolerance && Math.abs(im + mirrorIm) <= tolerance) return;
    throw new WindrowError('matrix.not-hermitian', `${name} is not Hermitian`, {
      where: `elements (${row}, ${column}) and (${column}, ${row})`,
      found: `${re} + ${im}i and ${mirrorRe} + ${mirrorIm}i`,
      allowed: 'complex conjugates of each other',
    });
  });
}

/** @throws WindrowError matrix.dimension, matrix.not-finite */
export function validateVector(vector: StateVector, dimension: number, name = 'the state'): void {
  if (vector.re.length !== dimension || (vector.im !== null && vector.im.length !== dimension)) {
    throw misfit(`${name} has the wrong length`, String(vector.re.length), `${dimension}`);
  }
  for (let k = 0; k < dimension; k += 1) {
    if (Number.isFinite(vector.re[k]) && (vector.im === null || Number.isFinite(vector.im[k]))) continue;
    throw new WindrowError('matrix.not-finite', `${name} has an element that is not a finite number`, { where: `element ${k}` });
  }
}

function misfit(message: string, found: string, allowed: string): WindrowError {
  return new WindrowError('matrix.dimension', message, { found, allowed });
}

function checkShape(matrix: HermitianMatrix, name: string): void {
  const n = matrix.dimension;
  if (!Number.isInteger(n) || n < 1) throw misfit(`${name} needs a positive whole dimension`, String(n), '1 or more');
  const expect = (array: { readonly length: number } | null, length: number, what: string): void => {
    if (array !== null && array.length !== length)
      throw misfit(`${what} of ${name} has the wrong length`, String(array.length), String(length));
  };
  if (matrix.kind === 'tridiagonal') {
    expect(matrix.diagonal, n, 'the diagonal');
    expect(matrix.offDiagonal, n - 1, 'the off-diagonal');
  } else if (matrix.kind === 'dense') {
    expect(matrix.re, n * n, 'the real plane');
    expect(matrix.im, n * n, 'the imaginary plane');
  } else {
    expect(matrix.rowStart, n + 1, 'the row index');
    expect(matrix.re, matrix.column.length, 'the real plane');
    expect(matrix.im, matrix.column.length, 'the imaginary plane');
    checkRows(matrix, name);
  }
}

function checkRows(matrix: SparseMatrix, name: string): void {
  const { dimension: n, rowStart, column } = matrix;
  if (rowStart[0] !== 0 || rowStart[n] !== column.length) {
    throw misfit(`the row index of ${name} does not span its elements`, `${rowStart[0]} to ${rowStart[n]}`, `0 to ${column.length}`);
  }
  for (let i = 0; i < n; i += 1) {
    if (rowStart[i + 1] < rowStart[i]) throw misfit(`the row index of ${name} descends`, `row ${i}`, 'ascending starts');
    for (let k = rowStart[i]; k < rowStart[i + 1]; k += 1) {
      const previous = k > rowStart[i] ? column[k - 1] : -1;
      if (column[k] > previous && column[k] < n) continue;
      throw misfit(`row ${i} of ${name} has columns out of order or range`, String(column[k]), `ascending, 0 to ${n - 1}`);
    }
  }
}

/** Position of an element by bisection of its row, −1 where it is not stored. */
function sparseLookup(matrix: SparseMatrix): (row: number, column: number) => number {
  const { rowStart, column } = matrix;
  return (i, j) => {
    let low = rowStart[i];
    let high = rowStart[i + 1] - 1;
    while (low <= high) {
      const middle = (low + high) >> 1;
      if (column[middle] === j) return middle;
      if (column[middle] < j) low = middle + 1;
      else high = middle - 1;
    }
    return -1;
  };
}
