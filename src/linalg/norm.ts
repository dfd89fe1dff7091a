/** Norms of Hermitian matrices and the power of two that brings them near one. */
import { forEachElement } from './elements.js';
import type { HermitianMatrix } from './matrix.js';

/**
 * An upper bound of the spectral norm ‖H‖₂: the smaller of the largest absolute row sum and the Frobenius norm (common practice; both
 * bound it). Exact for rings and diagonal matrices, within a factor √n always.
 *
 * Works at any scale that doubles hold; NaN or Infinity where the matrix, or the bound, is not finite. O(stored elements).
 */
export function normBound(matrix: HermitianMatrix): number {
  const rowSum = new Float64Array(matrix.dimension);
  let largest = 0;
  forEachElement(matrix, (row, _column, re, im) => {
    const size = im === 0 ? Math.abs(re) : Math.hypot(re, im);
    rowSum[row] += size;
    // Math.max keeps NaN.
    largest = Math.max(largest, size);
  });
  if (largest === 0 || !Number.isFinite(largest)) return largest;
  let squares = 0;
  forEachElement(matrix, (_row, _column, re, im) => {
    const x = re / largest;
    const y = im / largest;
    squares += x * x + y * y;
  });
  let row = 0;
  for (const sum of rowSum) row = Math.max(row, sum);
  return Math.min(row, largest * Math.sqrt(squares));
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
