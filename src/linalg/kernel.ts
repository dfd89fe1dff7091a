/**
 * The seam of the costly arithmetic: from a Hermitian matrix and a start vector to levels and weights.
 *
 * Every implementation passes tests/conformance/spectral-kernel.suite.ts; `referenceKernel` (TypeScript) is the yardstick. A kernel is
 * pure and deterministic: the same arguments give the same bits. Arguments are not modified unless said so. Nothing is validated; the
 * callers in src/spectral do that. Matrices of any finite scale are allowed: a kernel brings them near norm one by a power of two.
 */
import type { HermitianMatrix, StateVector } from './matrix.js';

/**
 * T = Q†HQ on the space reached from the start vector, with Q†φ = e_1 exactly. T is real: phases are absorbed into Q.
 * Off-diagonals are not negative; all but possibly the last rounding-level ones are positive, so T is unreduced.
 */
export interface Tridiagonalisation {
  /** length m ≤ n, in the unit of H */
  readonly diagonal: Float64Array;
  /** length m − 1 */
  readonly offDiagonal: Float64Array;
  /** Q†ψ, length m; null where nothing was carried. */
  readonly carried: StateVector | null;
  /**
   * True where the space is invariant under H to rounding, so that T holds everything φ can reach. False only for `lanczos` that was stopped
   * by `maximumSteps`.
   */
  readonly complete: boolean;
}

export interface SpectralKernel {
  readonly name: string;

  /**
   * Householder reduction whose first reflector maps φ to e_1. About 4n³/3 flops (four times that where H or φ is complex), 4n² bytes a
   * plane. Ends early where a column vanishes to rounding.
   * @param start φ, a unit vector
   * @param carried ψ, any vector, or null
   */
  householder(matrix: HermitianMatrix, start: StateVector, carried: StateVector | null): Tridiagonalisation;

  /**
   * Lanczos iteration from φ, kept orthogonal as far as T needs it: m steps take at most about 4nm² flops and 8nm bytes a plane. Stops
   * where everything that φ can reach has converged, at n, or after `maximumSteps`.
   */
  lanczos(matrix: HermitianMatrix, start: StateVector, carried: StateVector | null, maximumSteps: number): Tridiagonalisation;

  /**
   * Most steps of `lanczos` worth taking with a sparse matrix before the turn to `householder`; n where there is no turn.
   * @param plain matrix and start vector are real and nothing is carried
   */
  lanczosLimit(dimension: number, plain: boolean): number;

  /**
   * Eigenvalues of the real symmetric tridiagonal T, ascending. Each of `rows` (length n) is replaced by row·Z, Z the matrix of
   * eigenvectors in that order: e_1 becomes their first components. Rows are rotated, so that small components keep their digits.
   * O(n²) time.
   * @throws WindrowError kernel.no-convergence
   */
  eigen(diagonal: Float64Array, offDiagonal: Float64Array, rows: readonly Float64Array[]): Float64Array;
}
