/**
 * Linear systems with a real symmetric positive definite matrix, by Cholesky factorisation A = LLᵀ (common practice). n³/3 flops once and
 * 2n² for each right-hand side; 4n² bytes that stay, as many again while it is made (8n² each where WebAssembly does not run).
 */
import { CholeskyDecomposition, Matrix } from 'ml-matrix';
import { WindrowError } from '../core/errors.js';
import { padded, rowStart, triangleLength } from './wasm/layout.js';
import { addresses, fits, kernelsRun, takeWorkspace } from './wasm/workspace.js';

export type LinearSolve = (right: Float64Array) => Float64Array;

/** Calls `set` once for every pair i, j in either order (and not for the mirror image); elements that are left out are zero. */
export type WriteElements = (set: (i: number, j: number, value: number) => void) => void;

/** @throws WindrowError internal.invariant for a matrix that is not positive definite */
export function positiveDefiniteSolver(dimension: number, write: WriteElements): LinearSolve {
  const here = kernelsRun() && fits(8 * triangleLength(dimension));
  return (here ? vectorSolver : scalarSolver)(dimension, write);
}

export function scalarSolver(n: number, write: WriteElements): LinearSolve {
  const matrix = Matrix.zeros(n, n);
  write((i, j, value) => {
    matrix.set(i, j, value);
    matrix.set(j, i, value);
  });
  const factor = new CholeskyDecomposition(matrix);
  if (!factor.isPositiveDefinite()) throw indefinite();
  return (right) => Float64Array.from(factor.solve(Matrix.columnVector(right)).to1DArray());
}

export function vectorSolver(n: number, write: WriteElements): LinearSolve {
  const { take, bytes } = addresses();
  const length = triangleLength(n);
  const triangle = take(length);
  const workspace = takeWorkspace(bytes());
  try {
    const view = workspace.view(triangle, length);
    view.fill(0);
    write((i, j, value) => {
      const high = i > j ? i : j;
      const low = i > j ? j : i;
      view[rowStart(high) + low] = value;
      if (high >> 2 === low >> 2) view[rowStart(low) + high] = value;
    });
    for (let i = n; i < padded(n); i++) view[rowStart(i) + i] = 1;
    workspace.kernels.cholesky(triangle, n);
    const factor = view.slice();
    for (let i = 0; i < n; i++) if (!(factor[rowStart(i) + i] > 0)) throw indefinite();
    return (right) => substitute(factor, right);
  } finally {
    workspace.release();
  }
}

const indefinite = (): WindrowError => new WindrowError('internal.invariant', 'a matrix that must be positive definite is not');

/** L⁻ᵀ L⁻¹ times the right-hand side. */
function substitute(factor: Float64Array, right: Float64Array): Float64Array {
  const n = right.length;
  const x = right.slice();
  for (let i = 0; i < n; i++) {
    const start = rowStart(i);
    let value = x[i];
    for (let j = 0; j < i; j++) value -= factor[start + j] * x[j];
    x[i] = value / factor[start + i];
  }
  for (let i = n - 1; i >= 0; i--) {
    const start = rowStart(i);
    const value = x[i] / factor[start + i];
    x[i] = value;
    for (let j = 0; j < i; j++) x[j] -= factor[start + j] * value;
  }
  return x;
}
