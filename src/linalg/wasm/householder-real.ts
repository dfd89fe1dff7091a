/** Householder reduction of a real symmetric matrix in WebAssembly: lays out what assembly/householder-real.ts works on. */
import type { Tridiagonalisation } from '../kernel.js';
import type { HermitianMatrix, StateVector } from '../matrix.js';
import { normBound, unitScale } from '../norm.js';
import { BREAKDOWN } from '../precision.js';
import { pivotOf } from '../reference/packed.js';
import { packReversed, padded, reverse, triangleLength } from './layout.js';
import { addresses, takeWorkspace } from './workspace.js';

function layOut(n: number) {
  const { take, bytes } = addresses();
  const vector = (): number => take(padded(n));
  const plan = {
    triangle: take(triangleLength(n)),
    u: vector(),
    w: vector(),
    v: vector(),
    product: vector(),
    diagonal: vector(),
    offDiagonal: vector(),
    carried: take(2 * padded(n)),
  };
  return { ...plan, bytes: bytes() };
}

/** Bytes of WebAssembly memory that a reduction takes: 4n² and about 80n. */
export const householderRealBytes = (dimension: number): number => layOut(dimension).bytes;

/** For a real matrix and a real start vector; the carried vector may be complex. See `SpectralKernel.householder`. */
export function householderReal(matrix: HermitianMatrix, start: StateVector, carried: StateVector | null): Tridiagonalisation {
  const n = matrix.dimension;
  const scale = unitScale(normBound(matrix));
  const pivot = pivotOf(start);
  const planes = carried === null ? [] : carried.im === null ? [carried.re] : [carried.re, carried.im];
  const at = layOut(n);
  const workspace = takeWorkspace(at.bytes);
  try {
    packReversed(matrix, scale, pivot, workspace.view(at.triangle, triangleLength(n)));
    // All work vectors: what lies past n must be zero.
    workspace.view(at.u, (at.carried - at.u) / 8).fill(0);
    reverse(start.re, pivot, workspace.view(at.u, padded(n)));
    planes.forEach((plane, k) => reverse(plane, pivot, workspace.view(at.carried + 8 * padded(n) * k, padded(n))));
    const { householderReal: reduce } = workspace.kernels;
    const size = reduce(at.triangle, n, at.u, at.w, at.v, at.product, at.diagonal, at.offDiagonal, at.carried, planes.length, BREAKDOWN);
    const last = n - 1;
    const d = workspace.view(at.diagonal, n);
    const e = workspace.view(at.offDiagonal, n);
    const diagonal = Float64Array.from({ length: size }, (_, k) => d[last - k] / scale);
    const offDiagonal = Float64Array.from({ length: size - 1 }, (_, k) => Math.abs(e[last - 1 - k]) / scale);
    // e_1 of T is ±φ, and so on; the signs are given back to the carried vector.
    const signs = new Float64Array(size);
    for (let k = 0, sign = 1; k < size; k += 1) signs[k] = sign = e[last - k] < 0 ? -sign : sign;
    const [re, im] = planes.map((_, index) => {
      const plane = workspace.view(at.carried + 8 * padded(n) * index, n);
      return Float64Array.from(signs, (sign, k) => sign * plane[last - k]);
    });
    return { diagonal, offDiagonal, carried: carried === null ? null : { re, im: im ?? null }, complete: true };
  } finally {
    workspace.release();
  }
}
