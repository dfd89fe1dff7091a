/**
 * From a Hermitian matrix and two states to one entry an eigenvector, by the cheapest of three routes:
 *
 * - tridiagonal H: QL on H itself, carrying the rows φ† and ψ†. O(n²) for any pair of states.
 * - dense or small H: Householder from φ, then QL. About 4n³/3 flops.
 * - larger sparse H: Lanczos from φ for as many steps as the kernel finds worth it, a quarter of n as a rule: done where φ reaches that few
 *   levels (symmetry, fragmentation, localisation), at a tenth of Householder's flops. Otherwise Householder, which is then cheaper and
 *   smaller than Lanczos to the end.
 */
import { isComplexPair } from '../linalg/apply.js';
import type { SpectralKernel } from '../linalg/kernel.js';
import type { HermitianMatrix, StateVector, TridiagonalMatrix } from '../linalg/matrix.js';
import type { RawLevels } from './levels.js';

/** Sparse matrices up to this dimension go to Householder at once: a few milliseconds. */
export const SMALL = 96;

export interface Reduction {
  readonly levels: RawLevels;
  readonly method: 'tridiagonal-ql' | 'householder-ql' | 'lanczos-ql';
  /** The accessible dimension where the structure of H tells it exactly, else null. */
  readonly structuralDimension: number | null;
}

/** @param prepared null for the return problem */
export function reduce(matrix: HermitianMatrix, detected: StateVector, prepared: StateVector | null, kernel: SpectralKernel): Reduction {
  if (matrix.kind === 'tridiagonal') return reduceTridiagonal(matrix, detected, prepared, kernel);
  if (matrix.kind === 'sparse' && matrix.dimension > SMALL) {
    const limit = kernel.lanczosLimit(matrix.dimension, prepared === null && !isComplexPair(matrix, detected));
    const started = kernel.lanczos(matrix, detected, prepared, limit);
    if (started.complete) return finish(started, 'lanczos-ql', kernel);
  }
  return finish(kernel.householder(matrix, detected, prepared), 'householder-ql', kernel);
}

function finish(t: ReturnType<SpectralKernel['householder']>, method: Reduction['method'], kernel: SpectralKernel): Reduction {
  const first = new Float64Array(t.diagonal.length);
  first[0] = 1;
  const energies = kernel.eigen(t.diagonal, t.offDiagonal, [first, ...planesOf(t.carried)]);
  return { levels: levelsOf(energies, { re: first, im: null }, t.carried), method, structuralDimension: null };
}

function reduceTridiagonal(
  matrix: TridiagonalMatrix,
  detected: StateVector,
  prepared: StateVector | null,
  kernel: SpectralKernel,
): Reduction {
  const phi = copyOf(detected);
  const psi = prepared === null ? null : copyOf(prepared);
  const energies = kernel.eigen(matrix.diagonal, matrix.offDiagonal, [...planesOf(phi), ...planesOf(psi)]);
  return {
    levels: levelsOf(energies, phi, psi),
    method: 'tridiagonal-ql',
    structuralDimension: structuralDimension(matrix, detected),
  };
}

/**
 * The Krylov space of an end state of a tridiagonal matrix is the unreduced block it lies in: exact, whatever the weights are.
 * Null for any other state.
 */
export function structuralDimension(matrix: TridiagonalMatrix, state: StateVector): number | null {
  const n = matrix.dimension;
  const zeroAt = (k: number): boolean => state.re[k] === 0 && (state.im === null || state.im[k] === 0);
  let first = 0;
  while (first < n && zeroAt(first)) first += 1;
  let last = n - 1;
  while (last >= 0 && zeroAt(last)) last -= 1;
  if (first !== last) return null;
  if (last === 0) {
    const cut = matrix.offDiagonal.indexOf(0);
    return cut < 0 ? n : cut + 1;
  }
  return first === n - 1 ? n - 1 - matrix.offDiagonal.lastIndexOf(0) : null;
}

/** v = |a|², q = a b with a = <φ|y>, b = <y|ψ>; the eigenvectors y of T are real, a = conj of φ's row. */
function levelsOf(energies: Float64Array, phi: StateVector, psi: StateVector | null): RawLevels {
  const n = energies.length;
  const weights = Float64Array.from(energies, (_, k) => phi.re[k] ** 2 + (phi.im === null ? 0 : phi.im[k] ** 2));
  if (psi === null) return { energies, weights, overlap: null };
  const re = new Float64Array(n);
  const im = phi.im === null && psi.im === null ? null : new Float64Array(n);
  for (let k = 0; k < n; k += 1) {
    const aIm = phi.im === null ? 0 : -phi.im[k];
    const bIm = psi.im === null ? 0 : psi.im[k];
    re[k] = phi.re[k] * psi.re[k] - aIm * bIm;
    if (im !== null) im[k] = phi.re[k] * bIm + aIm * psi.re[k];
  }
  return { energies, weights, overlap: { re, im } };
}

function planesOf(vector: StateVector | null): Float64Array[] {
  return vector === null ? [] : vector.im === null ? [vector.re] : [vector.re, vector.im];
}

function copyOf(vector: StateVector): StateVector {
  return { re: vector.re.slice(), im: vector.im === null ? null : vector.im.slice() };
}
