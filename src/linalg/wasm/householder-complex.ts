/** Householder reduction of a complex Hermitian matrix in WebAssembly: lays out what assembly/householder-complex.ts works on. */
import type { Tridiagonalisation } from '../kernel.js';
import type { HermitianMatrix, StateVector } from '../matrix.js';
import { normBound, unitScale } from '../norm.js';
import { BREAKDOWN } from '../precision.js';
import { pivotOf } from '../reference/packed.js';
import { packReversedComplex, padded, reverseComplex, triangleLength, vectorPlace } from './layout.js';
import { addresses, takeWorkspace } from './workspace.js';

function layOut(n: number) {
  const { take, bytes } = addresses();
  const vector = (): number => take(2 * padded(n));
  const plan = {
    triangle: take(2 * triangleLength(n)),
    u: vector(),
    w: vector(),
    v: vector(),
    product: vector(),
    diagonal: vector(),
    offDiagonal: vector(),
    carried: vector(),
  };
  return { ...plan, bytes: bytes() };
}

/** Bytes of WebAssembly memory that a reduction takes: 8n² and about 140n. */
export const householderComplexBytes = (dimension: number): number => layOut(dimension).bytes;

/** For any Hermitian matrix and start vector; real ones are taken as complex. See `SpectralKernel.householder`. */
export function householderComplex(matrix: HermitianMatrix, start: StateVector, carried: StateVector | null): Tridiagonalisation {
  const n = matrix.dimension;
  const scale = unitScale(normBound(matrix));
  const pivot = pivotOf(start);
  const at = layOut(n);
  const workspace = takeWorkspace(at.bytes);
  try {
    packReversedComplex(matrix, scale, pivot, workspace.view(at.triangle, 2 * triangleLength(n)));
    // All work vectors: what lies past n must be zero.
    workspace.view(at.u, (at.bytes + at.triangle - at.u) / 8).fill(0);
    reverseComplex(start, pivot, workspace.view(at.u, 2 * padded(n)));
    if (carried !== null) reverseComplex(carried, pivot, workspace.view(at.carried, 2 * padded(n)));
    const { householderComplex: reduce } = workspace.kernels;
    const size = reduce(
      at.triangle,
      n,
      at.u,
      at.w,
      at.v,
      at.product,
      at.diagonal,
      at.offDiagonal,
      carried === null ? 0 : at.carried,
      BREAKDOWN,
    );
    const last = n - 1;
    const d = workspace.view(at.diagonal, n);
    const e = workspace.view(at.offDiagonal, 2 * n);
    const moduli = Float64Array.from({ length: size }, (_, k) => Math.hypot(e[2 * (last - k)], e[2 * (last - k) + 1]));
    return {
      diagonal: Float64Array.from({ length: size }, (_, k) => d[last - k] / scale),
      offDiagonal: moduli.slice(1).map((modulus) => modulus / scale),
      carried: carried === null ? null : withoutPhases(workspace.view(at.carried, 2 * padded(n)), e, moduli, last),
      complete: true,
    };
  } finally {
    workspace.release();
  }
}

/** The off-diagonals e, each over its modulus, multiply up to phases; the carried vector takes their conjugates. */
function withoutPhases(x: Float64Array, e: Float64Array, moduli: Float64Array, last: number): StateVector {
  const re = new Float64Array(moduli.length);
  const im = new Float64Array(moduli.length);
  let phaseRe = 1;
  let phaseIm = 0;
  for (let k = 0; k < moduli.length; k += 1) {
    const eRe = e[2 * (last - k)] / moduli[k];
    const eIm = e[2 * (last - k) + 1] / moduli[k];
    [phaseRe, phaseIm] = [eRe * phaseRe - eIm * phaseIm, eRe * phaseIm + eIm * phaseRe];
    const from = vectorPlace(last - k);
    re[k] = phaseRe * x[from] + phaseIm * x[from + 2];
    im[k] = phaseRe * x[from + 2] - phaseIm * x[from];
  }
  return { re, im };
}
