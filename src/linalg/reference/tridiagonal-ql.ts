/**
 * Eigenvalues of a real symmetric tridiagonal matrix by the implicit QL method, with rows carried through its rotations.
 *
 * Source: The implicit QL algorithm, Numerische Mathematik 12, 377 (1968), 10.1007/BF02165404 (from memory).
 * Only the rows asked for are rotated, so that the cost stays O(n²) where all eigenvectors would cost O(n³).
 *
 * Tried and left out: the square-root-free recurrence on squared off-diagonals. Its shorter chain of operations is lost again here to the
 * signs of the cosines, which no branch predictor can guess (0.8 times the speed at n = 4000, the same digits).
 */
import { WindrowError } from '../../core/errors.js';
import { unitScale } from '../norm.js';

/** QL needs under two sweeps an eigenvalue as a rule; thirty times as many mean that something is broken (NaN, for example). */
const SWEEPS_PER_LEVEL = 60;

/** Off-diagonals below this part of the norm are zero whatever their neighbours are: a zero diagonal has no relative scale. */
const ABSOLUTE_FLOOR = Number.EPSILON * Number.EPSILON;

/** See `SpectralKernel.eigen`. */
export function tridiagonalEigen(diagonal: Float64Array, offDiagonal: Float64Array, rows: readonly Float64Array[]): Float64Array {
  const n = diagonal.length;
  let largest = 0;
  for (const x of diagonal) largest = Math.max(largest, Math.abs(x));
  for (const x of offDiagonal) largest = Math.max(largest, Math.abs(x));
  const scale = unitScale(largest);
  const d = diagonal.map((x) => x * scale);
  const e = new Float64Array(n);
  for (let i = 0; i + 1 < n; i += 1) e[i] = Math.abs(offDiagonal[i]) * scale;
  carrySigns(offDiagonal, rows);

  // The method works from the last index up and is accurate where the matrix is graded that way, small elements first.
  const reversed = n > 1 && Math.abs(d[0]) > Math.abs(d[n - 1]);
  if (reversed) {
    d.reverse();
    e.subarray(0, n - 1).reverse();
    for (const row of rows) row.reverse();
  }
  iterate(d, e, rows);
  return sortLevels(d, rows, scale);
}

/** |T| = DTD with D the running product of the off-diagonals' signs; the rows absorb D. */
function carrySigns(offDiagonal: Float64Array, rows: readonly Float64Array[]): void {
  let negative = false;
  for (let i = 0; i < offDiagonal.length; i += 1) {
    if (offDiagonal[i] < 0) negative = !negative;
    if (negative) for (const row of rows) row[i + 1] = -row[i + 1];
  }
}

function iterate(d: Float64Array, e: Float64Array, rows: readonly Float64Array[]): void {
  const n = d.length;
  const cosines = new Float64Array(n);
  const sines = new Float64Array(n);
  let sweeps = 0;
  for (let first = 0; first < n; first += 1) {
    for (;;) {
      const last = blockEnd(d, e, first);
      if (last === first) break;
      sweeps += 1;
      if (sweeps > SWEEPS_PER_LEVEL * n) {
        throw new WindrowError('kernel.no-convergence', 'the eigenvalues of a tridiagonal matrix did not converge', {
          where: `level ${first + 1} of ${n}`,
          allowed: `${SWEEPS_PER_LEVEL} sweeps a level`,
        });
      }
      const stop = sweep(d, e, first, last, cosines, sines);
      for (const row of rows) rotate(row, stop, last, cosines, sines);
    }
  }
}

/** Last index of the unreduced block that begins at `first`. */
function blockEnd(d: Float64Array, e: Float64Array, first: number): number {
  const n = d.length;
  let m = first;
  for (; m < n - 1; m += 1) {
    const size = e[m] < 0 ? -e[m] : e[m];
    if (size <= ABSOLUTE_FLOOR || size <= 0.5 * Number.EPSILON * (Math.abs(d[m]) + Math.abs(d[m + 1]))) break;
  }
  return m;
}

/**
 * One QL sweep with the shift of the leading 2 × 2 block, from `last` up to `first`. Rotation i mixes indices i and i + 1.
 * @returns the lowest index that was rotated: above `first` where the sweep split the block on its way
 */
function sweep(d: Float64Array, e: Float64Array, first: number, last: number, cosines: Float64Array, sines: Float64Array): number {
  let g = (d[first + 1] - d[first]) / (2 * e[first]);
  let r = Math.sqrt(g * g + 1);
  g = d[last] - d[first] + e[first] / (g + (g < 0 ? -r : r));
  let s = 1;
  let c = 1;
  let p = 0;
  for (let i = last - 1; i >= first; i -= 1) {
    const f = s * e[i];
    const b = c * e[i];
    // Scaled to norm one, squares cannot overflow; where both underflow the block splits here.
    r = Math.sqrt(f * f + g * g);
    e[i + 1] = r;
    if (r === 0) {
      d[i + 1] -= p;
      e[last] = 0;
      return i + 1;
    }
    s = f / r;
    c = g / r;
    g = d[i + 1] - p;
    r = (d[i] - g) * s + 2 * c * b;
    p = s * r;
    d[i + 1] = g + p;
    g = c * r - b;
    cosines[i] = c;
    sines[i] = s;
  }
  d[first] -= p;
  e[first] = g;
  e[last] = 0;
  return first;
}

function rotate(row: Float64Array, first: number, last: number, cosines: Float64Array, sines: Float64Array): void {
  let high = row[last];
  for (let i = last - 1; i >= first; i -= 1) {
    const low = row[i];
    const s = sines[i];
    const c = cosines[i];
    row[i + 1] = s * low + c * high;
    high = c * low - s * high;
  }
  row[first] = high;
}

function sortLevels(d: Float64Array, rows: readonly Float64Array[], scale: number): Float64Array {
  const order = Int32Array.from(d, (_, k) => k).sort((a, b) => d[a] - d[b] || a - b);
  for (const row of rows) row.set(Float64Array.from(order, (k) => row[k]));
  return Float64Array.from(order, (k) => d[k] / scale);
}
