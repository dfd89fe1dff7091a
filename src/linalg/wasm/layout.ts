/**
 * Triangles as the WebAssembly kernels keep them: rows in blocks of four. A block of rows ends with its square on the diagonal, of which
 * both triangles are kept, so that every row begins on 32 bytes and no loop has a remainder. Missing rows and columns are zero.
 */
import { forEachElement } from '../elements.js';
import type { HermitianMatrix, StateVector } from '../matrix.js';

/** A length rounded up to whole blocks of four. */
export const padded = (length: number): number => Math.ceil(length / 4) * 4;

/** Index of the first element of row i. */
export function rowStart(i: number): number {
  const block = i >> 2;
  return 8 * block * (block + 1) + (i & 3) * 4 * (block + 1);
}

/** Number of elements of the triangle of an n × n matrix: n²/2 and about 2n for the squares. */
export const triangleLength = (n: number): number => rowStart(padded(n));

/**
 * Writes the real part of a matrix times `scale`, the order of indices turned round and index `pivot` last. For a start vector that is
 * turned the same way the reduction begins at its largest element (reference/packed.ts says why).
 */
export function packReversed(matrix: HermitianMatrix, scale: number, pivot: number, target: Float64Array): void {
  const n = matrix.dimension;
  target.fill(0);
  const place = Int32Array.from({ length: n }, (_, i) => n - 1 - i);
  place[0] = n - 1 - pivot;
  place[pivot] = n - 1;
  if (matrix.kind === 'dense') {
    for (let row = 0; row < n; row += 1) packRow(matrix.re, row * n, scale, place, place[row], target);
    return;
  }
  forEachElement(matrix, (row, column, re) => {
    const i = place[row];
    const j = place[column];
    if (j < padded(i + 1)) target[rowStart(i) + j] = re * scale;
  });
}

function packRow(source: Float64Array, from: number, scale: number, place: Int32Array, i: number, target: Float64Array): void {
  const start = rowStart(i);
  const end = padded(i + 1);
  for (let column = 0; column < place.length; column += 1) {
    const j = place[column];
    if (j < end) target[start + j] = source[from + column] * scale;
  }
}

/** Writes a plane in the order of `packReversed`. */
export function reverse(plane: Float64Array, pivot: number, target: Float64Array): void {
  const n = plane.length;
  target.fill(0);
  for (let i = 0; i < n; i += 1) target[n - 1 - i] = plane[i];
  target[n - 1 - pivot] = plane[0];
  target[n - 1] = plane[pivot];
}

/**
 * Where the real part of complex element (i, j) of a triangle stands: complex triangles have the same rows in records of two neighbours, real
 * parts before imaginary ones. The imaginary part is two further on.
 */
export const complexPlace = (i: number, j: number): number => 2 * rowStart(i) + vectorPlace(j);

/** The same for element j of a complex vector. */
export const vectorPlace = (j: number): number => 4 * (j >> 1) + (j & 1);

/** `packReversed` for complex matrices, or real ones that are taken as complex. */
export function packReversedComplex(matrix: HermitianMatrix, scale: number, pivot: number, target: Float64Array): void {
  const n = matrix.dimension;
  target.fill(0);
  forEachElement(matrix, (row, column, re, im) => {
    const i = reversed(row, pivot, n);
    const j = reversed(column, pivot, n);
    if (j >= padded(i + 1)) return;
    const at = complexPlace(i, j);
    target[at] = re * scale;
    // The diagonal of a Hermitian matrix is real; rounding of foreign input must not enter.
    if (i !== j) target[at + 2] = im * scale;
  });
}

/** Writes a vector in the order of `packReversedComplex`. */
export function reverseComplex(vector: StateVector, pivot: number, target: Float64Array): void {
  const n = vector.re.length;
  target.fill(0);
  for (let i = 0; i < n; i += 1) {
    const at = vectorPlace(reversed(i, pivot, n));
    target[at] = vector.re[i];
    target[at + 2] = vector.im === null ? 0 : vector.im[i];
  }
}

const reversed = (i: number, pivot: number, n: number): number => (i === pivot ? n - 1 : i === 0 ? n - 1 - pivot : n - 1 - i);
