/**
 * Storage of Hermitian matrices and state vectors.
 *
 * All numbers are IEEE double precision. A complex quantity is two planes, `re` and `im`; `im` is null where every imaginary part
 * is exactly zero, and the real kernels are used. Nothing here validates: builders guarantee Hermiticity, `validate.ts` checks foreign input.
 */
export interface StateVector {
  /** length n */
  readonly re: Float64Array;
  readonly im: Float64Array | null;
}

/** Real symmetric tridiagonal matrix. */
export interface TridiagonalMatrix {
  readonly kind: 'tridiagonal';
  readonly dimension: number;
  /** length n */
  readonly diagonal: Float64Array;
  /** length n − 1 (0 for n = 1); element i couples i and i + 1 */
  readonly offDiagonal: Float64Array;
}

/** Compressed sparse rows, both triangles and the diagonal stored, columns ascending within a row. */
export interface SparseMatrix {
  readonly kind: 'sparse';
  readonly dimension: number;
  /** length n + 1 */
  readonly rowStart: Int32Array;
  readonly column: Int32Array;
  readonly re: Float64Array;
  readonly im: Float64Array | null;
}

/** Row-major n × n, both triangles stored. */
export interface DenseMatrix {
  readonly kind: 'dense';
  readonly dimension: number;
  readonly re: Float64Array;
  readonly im: Float64Array | null;
}

export type HermitianMatrix = TridiagonalMatrix | SparseMatrix | DenseMatrix;
