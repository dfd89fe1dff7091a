/** Eigenvalues of a tridiagonal matrix in WebAssembly: lays out what assembly/tridiagonal-ql.ts works on. */
import { WindrowError } from '../../core/errors.js';
import { unitScale } from '../norm.js';
import { addresses, takeWorkspace } from './workspace.js';

/** QL needs under two sweeps an eigenvalue as a rule; thirty times as many mean that something is broken (NaN, for example). */
const SWEEPS_PER_LEVEL = 60;

/** Off-diagonals below this part of the norm, here its square, are zero whatever their neighbours are: a zero diagonal has no relative scale. */
const SQUARED_FLOOR = Number.EPSILON ** 4;

function layOut(n: number, rows: number) {
  const pairs = Math.max(1, Math.ceil(rows / 2));
  const { take, bytes } = addresses();
  const plan = { diagonal: take(n), squares: take(n), rotations: take(2 * n), rows: take(2 * n * pairs), pairs };
  return { ...plan, bytes: bytes() };
}

/** Bytes of WebAssembly memory that `rows` rows of length n take. */
export const tridiagonalEigenBytes = (n: number, rows: number): number => layOut(n, rows).bytes;

/** See `SpectralKernel.eigen`. */
export function tridiagonalEigen(diagonal: Float64Array, offDiagonal: Float64Array, rows: readonly Float64Array[]): Float64Array {
  const n = diagonal.length;
  let largest = 0;
  for (const x of diagonal) largest = Math.max(largest, Math.abs(x));
  for (const x of offDiagonal) largest = Math.max(largest, Math.abs(x));
  const scale = unitScale(largest);
  // The method works from the last index up and is accurate where the matrix is graded that way, small elements first.
  const reversed = Math.abs(diagonal[0]) > Math.abs(diagonal[n - 1]);
  const place = (i: number): number => (reversed ? n - 1 - i : i);
  const at = layOut(n, rows.length);
  const workspace = takeWorkspace(at.bytes);
  try {
    const d = workspace.view(at.diagonal, n);
    const squares = workspace.view(at.squares, n);
    const pairs = workspace.view(at.rows, 2 * n * at.pairs);
    for (let i = 0; i < n; i += 1) d[place(i)] = diagonal[i] * scale;
    for (let i = 0; i + 1 < n; i += 1) squares[reversed ? n - 2 - i : i] = (offDiagonal[i] * scale) ** 2;
    squares[n - 1] = 0;
    pairs.fill(0);
    // |T| = DTD with D the running product of the off-diagonals' signs; the rows absorb D.
    for (let i = 0, sign = 1; i < n; i += 1) {
      if (i > 0 && offDiagonal[i - 1] < 0) sign = -sign;
      rows.forEach((row, k) => (pairs[slot(n, k, place(i))] = sign * row[i]));
    }
    const { tridiagonalQl } = workspace.kernels;
    const failed = tridiagonalQl(n, at.diagonal, at.squares, at.rows, at.pairs, at.rotations, SQUARED_FLOOR, SWEEPS_PER_LEVEL * n);
    if (failed >= 0) {
      throw new WindrowError('kernel.no-convergence', 'the eigenvalues of a tridiagonal matrix did not converge', {
        where: `level ${failed + 1} of ${n}`,
        allowed: `${SWEEPS_PER_LEVEL} sweeps a level`,
      });
    }
    const order = Int32Array.from(d, (_, k) => k).sort((a, b) => d[a] - d[b] || a - b);
    rows.forEach((row, k) => order.forEach((from, to) => (row[to] = pairs[slot(n, k, from)])));
    return Float64Array.from(order, (k) => d[k] / scale);
  } finally {
    workspace.release();
  }
}

/** Where element i of row k stands: rows go in pairs, element by element. */
const slot = (n: number, k: number, i: number): number => ((k >> 1) * n + i) * 2 + (k & 1);
