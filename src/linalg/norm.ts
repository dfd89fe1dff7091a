/** Norms of Hermitian matrices and the power of two that brings them near one. */
import type { DenseMatrix, HermitianMatrix, SparseMatrix, TridiagonalMatrix } from './matrix.js';

/**
 * An upper bound of the spectral norm ‖H‖₂: the smaller of the largest absolute row sum and the Frobenius norm (common practice; both
 * bound it). Exact for rings and diagonal matrices, within a factor √n always.
 *
 * Works at any scale that doubles hold; NaN or Infinity where the matrix, or the bound, is not finite. O(stored elements).
 */
export function normBound(matrix: HermitianMatrix): number {
  const { row, largest } = matrix.kind === 'tridiagonal' ? tridiagonalRows(matrix) : storedRows(matrix);
  if (largest === 0 || !Number.isFinite(largest)) return largest;
  const scale = unitScale(largest);
  const squares =
    matrix.kind === 'tridiagonal'
      ? sumOfSquares(matrix.diagonal, scale) + 2 * sumOfSquares(matrix.offDiagonal, scale)
      : sumOfSquares(matrix.re, scale) + (matrix.im === null ? 0 : sumOfSquares(matrix.im, scale));
  return Math.min(row, Math.sqrt(squares) / scale);
}

/** The largest absolute row sum and the largest element; NaN where there is one. */
interface Rows {
  readonly row: number;
  readonly largest: number;
}

function tridiagonalRows({ dimension: n, diagonal, offDiagonal }: TridiagonalMatrix): Rows {
  let row = 0;
  let largest = 0;
  for (let i = 0; i < n; i += 1) {
    const before = i > 0 ? Math.abs(offDiagonal[i - 1]) : 0;
    const after = i + 1 < n ? Math.abs(offDiagonal[i]) : 0;
    const here = Math.abs(diagonal[i]);
    // Math.max keeps NaN.
    largest = Math.max(largest, before, here, after);
    row = Math.max(row, before + here + after);
  }
  return { row, largest };
}

function storedRows(matrix: SparseMatrix | DenseMatrix): Rows {
  const { dimension: n, re, im } = matrix;
  let row = 0;
  let largest = 0;
  for (let i = 0; i < n; i += 1) {
    const from = matrix.kind === 'sparse' ? matrix.rowStart[i] : i * n;
    const to = matrix.kind === 'sparse' ? matrix.rowStart[i + 1] : from + n;
    let sum = 0;
    let most = 0;
    for (let k = from; k < to; k += 1) {
      const size = im === null || im[k] === 0 ? Math.abs(re[k]) : Math.hypot(re[k], im[k]);
      sum += size;
      if (size > most) most = size;
    }
    // A sum that is not finite tells of an element that is not, or of an overflow that leaves the elements as they are.
    if (!Number.isFinite(sum)) for (let k = from; k < to; k += 1) most = Math.max(most, Math.abs(re[k]), im === null ? 0 : Math.abs(im[k]));
    largest = Math.max(largest, most);
    row = Math.max(row, sum);
  }
  return { row, largest };
}

function sumOfSquares(values: Float64Array, scale: number): number {
  let sum = 0;
  for (let k = 0; k < values.length; k += 1) {
    const x = values[k] * scale;
    sum += x * x;
  }
  return sum;
}

/**
 * 2^−k with norm·2^−k in [1/2, 1], within the range of normal numbers; 1 for a zero matrix. Multiplying by it is exact, so scaling changes
 * no digit of a result while squares can neither overflow nor vanish.
 */
export function unitScale(norm: number): number {
  if (norm === 0) return 1;
  const exponent = Math.ceil(Math.log2(norm));
  return 2 ** -Math.max(-1021, Math.min(1022, exponent));
}
