/**
 * Householder reduction of a real symmetric matrix to tridiagonal form, started from a given vector.
 *
 * Source: Householder's tridiagonalization of a symmetric matrix, Numerische Mathematik 11, 181 (1968), 10.1007/BF02161841 (from memory);
 * the first reflector, which maps the start vector to e_1, is derived in DEVELOPERS.md.
 *
 * A reflector P = 1 − 2uuᵀ changes the trailing block to A − uwᵀ − wuᵀ with w = 2Au − 2(uᵀAu)u. The next u is known from one updated
 * column, so the update and the next product Au share one pass over the matrix: memory is read once a step. Four rows are taken
 * together, so that u, w and the product are loaded once for four elements.
 */
import type { HermitianMatrix, StateVector } from '../matrix.js';
import type { Tridiagonalisation } from '../kernel.js';
import { normBound, unitScale } from '../norm.js';
import { BREAKDOWN } from '../precision.js';
import { packLower, pivoted, pivotOf } from './packed.js';

/** For a real matrix and a real start vector; the carried vector may be complex. See `SpectralKernel.householder`. */
export function householderReal(matrix: HermitianMatrix, start: StateVector, carried: StateVector | null): Tridiagonalisation {
  const n = matrix.dimension;
  const scale = unitScale(normBound(matrix));
  const pivot = pivotOf(start);
  const a = packLower(matrix, scale, false, pivot).re;
  const planes = [carried?.re, carried?.im].flatMap((plane) => (plane ? [pivoted(plane, pivot)] : []));
  const diagonal = new Float64Array(n);
  const offDiagonal = new Float64Array(Math.max(0, n - 1));
  let u: Float64Array = pivoted(start.re, pivot);
  let nextU: Float64Array = new Float64Array(n);
  const w = new Float64Array(n);
  const product = new Float64Array(n);

  // e_1 of T is ±φ; the sign is given back to the carried vector at the end of the reduction.
  const signs = new Float64Array(n);
  signs[0] = reflector(u, 0) < 0 ? -1 : 1;
  reflect(planes, u, 0);
  multiply(a, n, u, product);

  let size = n;
  for (let k = 0; k < n; k += 1) {
    rankTwoVector(u, product, w, k);
    const rowK = (k * (k + 1)) / 2;
    diagonal[k] = a[rowK + k] - 2 * u[k] * w[k];
    if (k === n - 1) break;
    let squares = 0;
    for (let i = k + 1, at = rowK + 2 * k + 1; i < n; i += 1, at += i) {
      const x = a[at] - u[i] * w[k] - w[i] * u[k];
      nextU[i] = x;
      squares += x * x;
    }
    if (Math.sqrt(squares) <= BREAKDOWN) {
      size = k + 1;
      break;
    }
    const e = reflector(nextU, k + 1);
    offDiagonal[k] = Math.abs(e);
    signs[k + 1] = e < 0 ? -signs[k] : signs[k];
    reflect(planes, nextU, k + 1);
    updateAndMultiply(a, n, k + 1, u, w, nextU, product);
    [u, nextU] = [nextU, u];
  }

  const [re, im] = planes.map((plane) => plane.slice(0, size).map((x, k) => x * signs[k]));
  return {
    diagonal: diagonal.slice(0, size).map((x) => x / scale),
    offDiagonal: offDiagonal.slice(0, size - 1).map((x) => x / scale),
    carried: carried === null ? null : { re, im: im ?? null },
    complete: true,
  };
}

/** Replaces x[from…] by the unit vector u with (1 − 2uuᵀ)x = r·e_from and returns r. The sign of r avoids cancellation. */
function reflector(x: Float64Array, from: number): number {
  let squares = 0;
  for (let i = from; i < x.length; i += 1) squares += x[i] * x[i];
  const norm = Math.sqrt(squares);
  const r = x[from] < 0 ? norm : -norm;
  const inverse = 1 / Math.sqrt(2 * norm * (norm + Math.abs(x[from])));
  x[from] -= r;
  for (let i = from; i < x.length; i += 1) x[i] *= inverse;
  return r;
}

function reflect(planes: readonly Float64Array[], u: Float64Array, from: number): void {
  for (const plane of planes) {
    let dot = 0;
    for (let i = from; i < u.length; i += 1) dot += u[i] * plane[i];
    for (let i = from; i < u.length; i += 1) plane[i] -= 2 * dot * u[i];
  }
}

/** w = 2Au − 2(uᵀAu)u from product = Au. */
function rankTwoVector(u: Float64Array, product: Float64Array, w: Float64Array, from: number): void {
  let dot = 0;
  for (let i = from; i < u.length; i += 1) dot += u[i] * product[i];
  for (let i = from; i < u.length; i += 1) w[i] = 2 * (product[i] - dot * u[i]);
}

function multiply(a: Float64Array, n: number, v: Float64Array, product: Float64Array): void {
  for (let i = 0, at = 0; i < n; i += 1) {
    let sum = 0;
    for (let j = 0; j < i; j += 1, at += 1) {
      sum += a[at] * v[j];
      product[j] += a[at] * v[i];
    }
    product[i] = sum + a[at] * v[i];
    at += 1;
  }
}

/** A ← A − uwᵀ − wuᵀ on the lower triangle from `from` on, and product = Av of the result. */
function updateAndMultiply(
  a: Float64Array,
  n: number,
  from: number,
  u: Float64Array,
  w: Float64Array,
  v: Float64Array,
  product: Float64Array,
): void {
  product.fill(0, from);
  let i = from;
  for (; i + 3 < n; i += 4) {
    fourRows(a, i, from, u, w, v, product);
    for (let r = 0; r < 4; r += 1) oneRow(a, i + r, i, u, w, v, product);
  }
  for (; i < n; i += 1) oneRow(a, i, from, u, w, v, product);
}

function oneRow(a: Float64Array, i: number, from: number, u: Float64Array, w: Float64Array, v: Float64Array, product: Float64Array): void {
  const row = (i * (i + 1)) / 2;
  const ui = u[i];
  const wi = w[i];
  const vi = v[i];
  let sum = 0;
  for (let j = from; j < i; j += 1) {
    const x = a[row + j] - ui * w[j] - wi * u[j];
    a[row + j] = x;
    sum += x * v[j];
    product[j] += x * vi;
  }
  const x = a[row + i] - 2 * ui * wi;
  a[row + i] = x;
  product[i] += sum + x * vi;
}

/** Rows i … i + 3 against columns `from` … i − 1. */
function fourRows(
  a: Float64Array,
  i: number,
  from: number,
  u: Float64Array,
  w: Float64Array,
  v: Float64Array,
  product: Float64Array,
): void {
  let p0 = (i * (i + 1)) / 2 + from;
  let p1 = p0 + i + 1;
  let p2 = p1 + i + 2;
  let p3 = p2 + i + 3;
  const u0 = u[i];
  const u1 = u[i + 1];
  const u2 = u[i + 2];
  const u3 = u[i + 3];
  const w0 = w[i];
  const w1 = w[i + 1];
  const w2 = w[i + 2];
  const w3 = w[i + 3];
  const v0 = v[i];
  const v1 = v[i + 1];
  const v2 = v[i + 2];
  const v3 = v[i + 3];
  let s0 = 0;
  let s1 = 0;
  let s2 = 0;
  let s3 = 0;
  for (let j = from; j < i; j += 1) {
    const uj = u[j];
    const wj = w[j];
    const vj = v[j];
    const x0 = a[p0] - u0 * wj - w0 * uj;
    const x1 = a[p1] - u1 * wj - w1 * uj;
    const x2 = a[p2] - u2 * wj - w2 * uj;
    const x3 = a[p3] - u3 * wj - w3 * uj;
    a[p0] = x0;
    a[p1] = x1;
    a[p2] = x2;
    a[p3] = x3;
    s0 += x0 * vj;
    s1 += x1 * vj;
    s2 += x2 * vj;
    s3 += x3 * vj;
    product[j] += x0 * v0 + x1 * v1 + (x2 * v2 + x3 * v3);
    p0 += 1;
    p1 += 1;
    p2 += 1;
    p3 += 1;
  }
  product[i] += s0;
  product[i + 1] += s1;
  product[i + 2] += s2;
  product[i + 3] += s3;
}
