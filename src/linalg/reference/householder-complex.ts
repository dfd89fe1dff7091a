/**
 * Householder reduction of a complex Hermitian matrix to real tridiagonal form, started from a given vector.
 *
 * The same scheme as householder-real.ts on split planes: reflectors P = 1 − 2uu† are Hermitian, so that every off-diagonal element comes
 * out complex, and a diagonal of phases makes them positive at the end (derived in DEVELOPERS.md). Two rows are taken together.
 */
import type { Tridiagonalisation } from '../kernel.js';
import type { HermitianMatrix, StateVector } from '../matrix.js';
import { normBound, unitScale } from '../norm.js';
import { BREAKDOWN } from '../precision.js';
import type { PackedLower } from './packed.js';
import { packLower, pivoted, pivotOf } from './packed.js';

interface Planes {
  readonly re: Float64Array;
  readonly im: Float64Array;
}

/** For any Hermitian matrix and start vector; real ones are taken as complex. See `SpectralKernel.householder`. */
export function householderComplex(matrix: HermitianMatrix, start: StateVector, carried: StateVector | null): Tridiagonalisation {
  const n = matrix.dimension;
  const scale = unitScale(normBound(matrix));
  const pivot = pivotOf(start);
  const a = packLower(matrix, scale, true, pivot);
  const rotated = carried === null ? null : pivotedPlanes(carried, pivot);
  const diagonal = new Float64Array(n);
  const offDiagonal = new Float64Array(Math.max(0, n - 1));
  const phases = zeros(n);
  const w = zeros(n);
  const product = zeros(n);
  let u = pivotedPlanes(start, pivot);
  let nextU = zeros(n);

  const first = reflector(u, 0);
  phases.re[0] = first.re / first.norm;
  phases.im[0] = first.im / first.norm;
  if (rotated !== null) reflect(rotated, u, 0);
  // With w = 0 nothing is subtracted: the pass is a plain product.
  updateAndMultiply(a, n, 0, u, w, u, product);

  let size = n;
  for (let k = 0; k < n; k += 1) {
    rankTwoVector(u, product, w, k);
    const rowK = (k * (k + 1)) / 2;
    diagonal[k] = a.re[rowK + k] - 2 * (u.re[k] * w.re[k] + u.im[k] * w.im[k]);
    if (k === n - 1) break;
    if (updatedColumn(a, n, k, u, w, nextU) <= BREAKDOWN) {
      size = k + 1;
      break;
    }
    const e = reflector(nextU, k + 1);
    offDiagonal[k] = e.norm;
    phases.re[k + 1] = (e.re * phases.re[k] - e.im * phases.im[k]) / e.norm;
    phases.im[k + 1] = (e.re * phases.im[k] + e.im * phases.re[k]) / e.norm;
    if (rotated !== null) reflect(rotated, nextU, k + 1);
    updateAndMultiply(a, n, k + 1, u, w, nextU, product);
    [u, nextU] = [nextU, u];
  }
  return {
    diagonal: diagonal.slice(0, size).map((x) => x / scale),
    offDiagonal: offDiagonal.slice(0, size - 1).map((x) => x / scale),
    carried: rotated === null ? null : withoutPhases(rotated, phases, size),
    complete: true,
  };
}

function zeros(n: number): Planes {
  return { re: new Float64Array(n), im: new Float64Array(n) };
}

function pivotedPlanes(vector: StateVector, pivot: number): Planes {
  return { re: pivoted(vector.re, pivot), im: vector.im === null ? new Float64Array(vector.re.length) : pivoted(vector.im, pivot) };
}

/** conj(phase_k)·x_k for the first `size` elements. */
function withoutPhases(x: Planes, phases: Planes, size: number): Planes {
  const out = zeros(size);
  for (let k = 0; k < size; k += 1) {
    out.re[k] = phases.re[k] * x.re[k] + phases.im[k] * x.im[k];
    out.im[k] = phases.re[k] * x.im[k] - phases.im[k] * x.re[k];
  }
  return out;
}

/** Column k below the diagonal after the pending update, written to `column`; its norm. */
function updatedColumn(a: PackedLower, n: number, k: number, u: Planes, w: Planes, column: Planes): number {
  const aIm = a.im as Float64Array;
  let squares = 0;
  for (let i = k + 1, at = (k * (k + 1)) / 2 + 2 * k + 1; i < n; i += 1, at += i) {
    const re = a.re[at] - (u.re[i] * w.re[k] + u.im[i] * w.im[k]) - (w.re[i] * u.re[k] + w.im[i] * u.im[k]);
    const im = aIm[at] - (u.im[i] * w.re[k] - u.re[i] * w.im[k]) - (w.im[i] * u.re[k] - w.re[i] * u.im[k]);
    column.re[i] = re;
    column.im[i] = im;
    squares += re * re + im * im;
  }
  return Math.sqrt(squares);
}

/** Replaces x[from…] by the unit vector u with (1 − 2uu†)x = r·e_from; r has the opposite phase of x_from, so nothing cancels. */
function reflector(x: Planes, from: number): { re: number; im: number; norm: number } {
  const { re, im } = x;
  const n = re.length;
  let squares = 0;
  for (let i = from; i < n; i += 1) squares += re[i] * re[i] + im[i] * im[i];
  const norm = Math.sqrt(squares);
  const lead = Math.hypot(re[from], im[from]);
  const rRe = lead === 0 ? -norm : (-norm * re[from]) / lead;
  const rIm = lead === 0 ? 0 : (-norm * im[from]) / lead;
  const inverse = 1 / Math.sqrt(2 * norm * (norm + lead));
  re[from] -= rRe;
  im[from] -= rIm;
  for (let i = from; i < n; i += 1) {
    re[i] *= inverse;
    im[i] *= inverse;
  }
  return { re: rRe, im: rIm, norm };
}

function reflect(x: Planes, u: Planes, from: number): void {
  let dotRe = 0;
  let dotIm = 0;
  for (let i = from; i < x.re.length; i += 1) {
    dotRe += u.re[i] * x.re[i] + u.im[i] * x.im[i];
    dotIm += u.re[i] * x.im[i] - u.im[i] * x.re[i];
  }
  for (let i = from; i < x.re.length; i += 1) {
    x.re[i] -= 2 * (u.re[i] * dotRe - u.im[i] * dotIm);
    x.im[i] -= 2 * (u.re[i] * dotIm + u.im[i] * dotRe);
  }
}

/** w = 2Au − 2(u†Au)u from product = Au; u†Au is real. */
function rankTwoVector(u: Planes, product: Planes, w: Planes, from: number): void {
  const n = u.re.length;
  let dot = 0;
  for (let i = from; i < n; i += 1) dot += u.re[i] * product.re[i] + u.im[i] * product.im[i];
  for (let i = from; i < n; i += 1) {
    w.re[i] = 2 * (product.re[i] - dot * u.re[i]);
    w.im[i] = 2 * (product.im[i] - dot * u.im[i]);
  }
}

/** A ← A − uw† − wu† on the lower triangle from `from` on, and product = Av of the result. */
function updateAndMultiply(a: PackedLower, n: number, from: number, u: Planes, w: Planes, v: Planes, product: Planes): void {
  product.re.fill(0, from);
  product.im.fill(0, from);
  let i = from;
  for (; i + 1 < n; i += 2) {
    twoRows(a, i, from, u, w, v, product);
    oneRow(a, i, i, u, w, v, product);
    oneRow(a, i + 1, i, u, w, v, product);
  }
  for (; i < n; i += 1) oneRow(a, i, from, u, w, v, product);
}

/** Row i against columns `from` … i. */
function oneRow(a: PackedLower, i: number, from: number, u: Planes, w: Planes, v: Planes, product: Planes): void {
  const aIm = a.im as Float64Array;
  const row = (i * (i + 1)) / 2;
  let sumRe = 0;
  let sumIm = 0;
  for (let j = from; j < i; j += 1) {
    const re = a.re[row + j] - (u.re[i] * w.re[j] + u.im[i] * w.im[j]) - (w.re[i] * u.re[j] + w.im[i] * u.im[j]);
    const im = aIm[row + j] - (u.im[i] * w.re[j] - u.re[i] * w.im[j]) - (w.im[i] * u.re[j] - w.re[i] * u.im[j]);
    a.re[row + j] = re;
    aIm[row + j] = im;
    sumRe += re * v.re[j] - im * v.im[j];
    sumIm += re * v.im[j] + im * v.re[j];
    product.re[j] += re * v.re[i] + im * v.im[i];
    product.im[j] += re * v.im[i] - im * v.re[i];
  }
  const d = a.re[row + i] - 2 * (u.re[i] * w.re[i] + u.im[i] * w.im[i]);
  a.re[row + i] = d;
  product.re[i] += sumRe + d * v.re[i];
  product.im[i] += sumIm + d * v.im[i];
}

/** Rows i and i + 1 against columns `from` … i − 1. */
function twoRows(a: PackedLower, i: number, from: number, u: Planes, w: Planes, v: Planes, product: Planes): void {
  const aRe = a.re;
  const aIm = a.im as Float64Array;
  const { re: uRe, im: uIm } = u;
  const { re: wRe, im: wIm } = w;
  const { re: vRe, im: vIm } = v;
  const { re: pRe, im: pIm } = product;
  const [u0, u0i, u1, u1i] = [uRe[i], uIm[i], uRe[i + 1], uIm[i + 1]];
  const [w0, w0i, w1, w1i] = [wRe[i], wIm[i], wRe[i + 1], wIm[i + 1]];
  const [v0, v0i, v1, v1i] = [vRe[i], vIm[i], vRe[i + 1], vIm[i + 1]];
  let s0 = 0;
  let s0i = 0;
  let s1 = 0;
  let s1i = 0;
  let p0 = (i * (i + 1)) / 2 + from;
  let p1 = p0 + i + 1;
  for (let j = from; j < i; j += 1) {
    const uj = uRe[j];
    const uji = uIm[j];
    const wj = wRe[j];
    const wji = wIm[j];
    const x0 = aRe[p0] - (u0 * wj + u0i * wji) - (w0 * uj + w0i * uji);
    const x0i = aIm[p0] - (u0i * wj - u0 * wji) - (w0i * uj - w0 * uji);
    const x1 = aRe[p1] - (u1 * wj + u1i * wji) - (w1 * uj + w1i * uji);
    const x1i = aIm[p1] - (u1i * wj - u1 * wji) - (w1i * uj - w1 * uji);
    aRe[p0] = x0;
    aIm[p0] = x0i;
    aRe[p1] = x1;
    aIm[p1] = x1i;
    const vj = vRe[j];
    const vji = vIm[j];
    s0 += x0 * vj - x0i * vji;
    s0i += x0 * vji + x0i * vj;
    s1 += x1 * vj - x1i * vji;
    s1i += x1 * vji + x1i * vj;
    pRe[j] += x0 * v0 + x0i * v0i + (x1 * v1 + x1i * v1i);
    pIm[j] += x0 * v0i - x0i * v0 + (x1 * v1i - x1i * v1);
    p0 += 1;
    p1 += 1;
  }
  pRe[i] += s0;
  pIm[i] += s0i;
  pRe[i + 1] += s1;
  pIm[i + 1] += s1i;
}
