/**
 * Lanczos tridiagonalisation with full reorthogonalisation.
 *
 * Source: An iteration method for the solution of the eigenvalue problem of linear differential and integral operators, Journal of
 * Research of the National Bureau of Standards 45, 255 (1950), 10.6028/jres.045.026 (from memory). One pass of reorthogonalisation is
 * repeated while it takes a sizeable part of the vector away, which makes the basis orthogonal to rounding (common practice: twice is enough).
 *
 * When to stop stands in krylov-convergence.ts. An iteration that never gets there runs on to n.
 */
import { applyMatrix, isComplexPair } from '../apply.js';
import type { Tridiagonalisation } from '../kernel.js';
import { FIRST_CHECK, krylovConverged, nextCheck } from '../krylov-convergence.js';
import type { HermitianMatrix, StateVector } from '../matrix.js';
import { normBound, unitScale } from '../norm.js';
import { BREAKDOWN } from '../precision.js';
import { innerProduct, squaredNorm, zeroVector } from '../vector.js';
import { orthogonaliseComplex, orthogonaliseReal } from './orthogonalise.js';
import { tridiagonalEigen } from './tridiagonal-ql.js';

const MOST_PASSES = 5;

/** See `SpectralKernel.lanczos`. */
export function lanczos(
  matrix: HermitianMatrix,
  start: StateVector,
  carried: StateVector | null,
  maximumSteps: number,
): Tridiagonalisation {
  const n = matrix.dimension;
  const norm = normBound(matrix);
  const scale = unitScale(norm);
  const complex = isComplexPair(matrix, start);
  const basisRe: Float64Array[] = [];
  const basisIm: Float64Array[] = [];
  const alpha: number[] = [];
  const beta: number[] = [];
  const overlaps: [number, number][] = [];
  let q = scaled(start, 1 / Math.sqrt(squaredNorm(start)), complex);
  let previous: StateVector | null = null;
  let complete: boolean;
  let check = FIRST_CHECK;
  for (let k = 0; ; k += 1) {
    basisRe.push(q.re);
    if (q.im !== null) basisIm.push(q.im);
    if (carried !== null) overlaps.push(innerProduct(q, carried));
    const w = zeroVector(n, complex);
    applyMatrix(matrix, q, w);
    multiplyBy(w, scale);
    const a = innerProduct(q, w)[0];
    alpha.push(a);
    subtract(w, a, q);
    if (previous !== null) subtract(w, beta[k - 1], previous);
    if (k + 1 === n) {
      complete = true;
      break;
    }
    const residual = orthogonalise(basisRe, basisIm, w);
    if (residual <= BREAKDOWN) {
      complete = true;
      break;
    }
    if (k + 1 === check || k + 1 >= maximumSteps) {
      complete = krylovConverged(Float64Array.from(alpha), Float64Array.from(beta), residual, n, norm * scale, tridiagonalEigen);
      if (complete || k + 1 >= maximumSteps) break;
      check = nextCheck(check);
    }
    beta.push(residual);
    previous = q;
    multiplyBy(w, 1 / residual);
    q = w;
  }
  return {
    diagonal: Float64Array.from(alpha, (x) => x / scale),
    offDiagonal: Float64Array.from(beta, (x) => x / scale),
    carried: carried === null ? null : planes(overlaps, complex || carried.im !== null),
    complete,
  };
}

/** Orthogonalises w against the whole basis until a pass leaves it nearly as long as it was; its norm. */
function orthogonalise(basisRe: readonly Float64Array[], basisIm: readonly Float64Array[], w: StateVector): number {
  let before = Math.sqrt(squaredNorm(w));
  for (let pass = 0; pass < MOST_PASSES; pass += 1) {
    if (w.im === null) orthogonaliseReal(basisRe, basisRe.length, w.re);
    else orthogonaliseComplex(basisRe, basisIm, basisRe.length, w.re, w.im);
    const after = Math.sqrt(squaredNorm(w));
    if (after > 0.7 * before || after <= BREAKDOWN) return after;
    before = after;
  }
  return before;
}

function scaled(x: StateVector, factor: number, complex: boolean): StateVector {
  const y = zeroVector(x.re.length, complex);
  y.re.set(x.re);
  if (x.im !== null) y.im?.set(x.im);
  multiplyBy(y, factor);
  return y;
}

function multiplyBy(x: StateVector, factor: number): void {
  for (const plane of [x.re, x.im]) if (plane !== null) for (let i = 0; i < plane.length; i += 1) plane[i] *= factor;
}

/** x ← x − factor·y */
function subtract(x: StateVector, factor: number, y: StateVector): void {
  for (let i = 0; i < x.re.length; i += 1) x.re[i] -= factor * y.re[i];
  if (x.im !== null && y.im !== null) for (let i = 0; i < x.im.length; i += 1) x.im[i] -= factor * y.im[i];
}

function planes(values: readonly (readonly [number, number])[], complex: boolean): StateVector {
  return {
    re: Float64Array.from(values, ([re]) => re),
    im: complex ? Float64Array.from(values, ([, im]) => im) : null,
  };
}
