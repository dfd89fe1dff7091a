/**
 * Lower triangles packed row by row: element (i, j), j ≤ i, stands at i(i + 1)/2 + j. Half the memory of a square, and read in order.
 *
 * Index `pivot` and index 0 change places on the way. With the largest element of the start vector in front, a start at one basis state
 * needs no mixing of rows at all, and the digits of weakly coupled small elements survive beside large ones.
 */
import { forEachElement } from '../elements.js';
import type { HermitianMatrix, StateVector } from '../matrix.js';

export interface PackedLower {
  readonly re: Float64Array;
  readonly im: Float64Array | null;
}

/** The lower triangle times `scale`; `complex` asks for an imaginary plane even where the matrix is real. */
export function packLower(matrix: HermitianMatrix, scale: number, complex: boolean, pivot: number): PackedLower {
  const length = (matrix.dimension * (matrix.dimension + 1)) / 2;
  const re = new Float64Array(length);
  const im = complex ? new Float64Array(length) : null;
  forEachElement(matrix, (row, column, elementRe, elementIm) => {
    const i = row === pivot ? 0 : row === 0 ? pivot : row;
    const j = column === pivot ? 0 : column === 0 ? pivot : column;
    if (j > i) return;
    const at = (i * (i + 1)) / 2 + j;
    re[at] = elementRe * scale;
    // The diagonal of a Hermitian matrix is real; rounding of foreign input must not enter.
    if (im !== null && j < i) im[at] = elementIm * scale;
  });
  return { re, im };
}

/** Index of the largest element. */
export function pivotOf(state: StateVector): number {
  const size = (k: number): number => state.re[k] ** 2 + (state.im === null ? 0 : state.im[k] ** 2);
  let pivot = 0;
  for (let k = 1; k < state.re.length; k += 1) if (size(k) > size(pivot)) pivot = k;
  return pivot;
}

/** A copy with elements 0 and `pivot` exchanged. */
export function pivoted(plane: Float64Array, pivot: number): Float64Array {
  const copy = plane.slice();
  copy[0] = plane[pivot];
  copy[pivot] = plane[0];
  return copy;
}
