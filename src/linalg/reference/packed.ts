/** Lower triangles packed row by row: element (i, j), j ≤ i, stands at i(i + 1)/2 + j. Half the memory of a square, and read in order. */
import { forEachElement } from '../elements.js';
import type { HermitianMatrix } from '../matrix.js';

export interface PackedLower {
  readonly re: Float64Array;
  readonly im: Float64Array | null;
}

/** The lower triangle times `scale`; `complex` asks for an imaginary plane even where the matrix is real. */
export function packLower(matrix: HermitianMatrix, scale: number, complex: boolean): PackedLower {
  const length = (matrix.dimension * (matrix.dimension + 1)) / 2;
  const re = new Float64Array(length);
  const im = complex ? new Float64Array(length) : null;
  forEachElement(matrix, (i, j, elementRe, elementIm) => {
    if (j > i) return;
    const at = (i * (i + 1)) / 2 + j;
    re[at] = elementRe * scale;
    // The diagonal of a Hermitian matrix is real; rounding of foreign input must not enter.
    if (im !== null && j < i) im[at] = elementIm * scale;
  });
  return { re, im };
}
