/** Lanczos iteration with a real sparse matrix in WebAssembly: lays out what assembly/lanczos.ts works on, and asks when it is done. */
import type { Tridiagonalisation } from '../kernel.js';
import { FIRST_CHECK, krylovConverged, nextCheck } from '../krylov-convergence.js';
import type { SparseMatrix, StateVector } from '../matrix.js';
import { normBound, unitScale } from '../norm.js';
import { BREAKDOWN } from '../precision.js';
import { squaredNorm } from '../vector.js';
import { padded } from './layout.js';
import { tridiagonalEigen } from './tridiagonal-ql.js';
import { addresses, takeWorkspace, type Workspace } from './workspace.js';

/** Loss of orthogonality up to √ε leaves T as it is. Overlaps with a carried vector feel it directly, so that there it is kept down. */
const SEMIORTHOGONAL = Math.sqrt(Number.EPSILON);
const NEARLY_ORTHOGONAL = 1e-13;

/** The share of the steps up to which it is asked whether the iteration is done. */
const ASKED = 0.75;

function layOut(n: number, nonzeros: number) {
  const { take, bytes } = addresses();
  const vector = (): number => take(padded(n));
  const plan = {
    rows: take((n + 1) / 2 + 1),
    columns: take(nonzeros / 2 + 1),
    values: take(nonzeros),
    w: vector(),
    alpha: vector(),
    beta: vector(),
    even: take(n + 2),
    odd: take(n + 2),
    residual: take(1),
    carried: take(2 * padded(n)),
    overlaps: vector(),
  };
  return { ...plan, basis: plan.overlaps + 8 * padded(n), fixed: bytes() };
}

/** Bytes of WebAssembly memory that `steps` steps take: 8n a step, and 12 an element of the matrix. */
export function lanczosBytes(dimension: number, nonzeros: number, steps: number): number {
  return layOut(dimension, nonzeros).fixed + 8 * padded(dimension) * (Math.min(steps, dimension) + 1) + 64;
}

/** For a real matrix and a real start vector; the carried vector may be complex. See `SpectralKernel.lanczos`. */
export function lanczos(matrix: SparseMatrix, start: StateVector, carried: StateVector | null, maximumSteps: number): Tridiagonalisation {
  const n = matrix.dimension;
  const nonzeros = matrix.re.length;
  const norm = normBound(matrix);
  const scale = unitScale(norm);
  const at = layOut(n, nonzeros);
  const workspace = takeWorkspace(at.fixed);
  try {
    load(workspace, at, matrix, start, scale);
    const { lanczosSteps } = workspace.kernels;
    const threshold = carried === null ? SEMIORTHOGONAL : NEARLY_ORTHOGONAL;
    const end = Math.min(maximumSteps, n);
    const copied = (address: number, length: number): Float64Array => workspace.view(address, length).slice();
    let complete = false;
    let m = 0;
    for (let check = FIRST_CHECK; !complete && m < end; check = nextCheck(check)) {
      const to = Math.min(check, end);
      workspace.reserve(lanczosBytes(n, nonzeros, to));
      // The estimates begin one number after their addresses, so that there is one before the first.
      const done = lanczosSteps(
        n,
        at.rows,
        at.columns,
        at.values,
        at.basis,
        at.w,
        at.alpha,
        at.beta,
        at.even + 8,
        at.odd + 8,
        at.residual,
        m,
        to,
        threshold,
        BREAKDOWN,
      );
      m = Math.abs(done);
      const [residual] = workspace.view(at.residual, 1);
      // Close to n the steps that are left cost less than asking.
      const ask = m === end || m <= ASKED * n;
      complete =
        done < 0 || (ask && krylovConverged(copied(at.alpha, m), copied(at.beta, m - 1), residual, n, norm * scale, tridiagonalEigen));
    }
    return {
      diagonal: copied(at.alpha, m).map((x) => x / scale),
      offDiagonal: copied(at.beta, m - 1).map((x) => x / scale),
      carried: carried === null ? null : overlapsWith(workspace, at, n, m, carried),
      complete,
    };
  } finally {
    workspace.release();
  }
}

function load(workspace: Workspace, at: ReturnType<typeof layOut>, matrix: SparseMatrix, start: StateVector, scale: number): void {
  const n = matrix.dimension;
  workspace.view(at.w, (at.basis - at.w) / 8).fill(0);
  workspace.integers(at.rows, n + 1).set(matrix.rowStart);
  workspace.integers(at.columns, matrix.column.length).set(matrix.column);
  const values = workspace.view(at.values, matrix.re.length);
  for (let k = 0; k < values.length; k += 1) values[k] = matrix.re[k] * scale;
  workspace.reserve(lanczosBytes(n, matrix.re.length, 1));
  const first = workspace.view(at.basis, padded(n));
  const length = Math.sqrt(squaredNorm(start));
  first.fill(0);
  for (let i = 0; i < n; i += 1) first[i] = start.re[i] / length;
}

function overlapsWith(workspace: Workspace, at: ReturnType<typeof layOut>, n: number, steps: number, carried: StateVector): StateVector {
  const along = (plane: Float64Array): Float64Array => {
    workspace.view(at.carried, n).set(plane);
    workspace.kernels.overlaps(at.basis, steps, n, at.carried, at.overlaps);
    return workspace.view(at.overlaps, steps).slice();
  };
  return { re: along(carried.re), im: carried.im === null ? null : along(carried.im) };
}
