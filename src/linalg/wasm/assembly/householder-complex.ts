/**
 * Householder reduction of a complex Hermitian matrix from its last index up: the scheme of householder-real.ts.
 *
 * Complex numbers go in records of two: real parts of two neighbours, then their imaginary parts, so that one address serves both. A row is
 * worked on alone: with six numbers of it held in both lanes and two sums, the registers are full.
 */
import { rowStart } from './vectors';

/**
 * @param a rows in blocks of four, scaled to norm one, in records; destroyed
 * @param n dimension
 * @param u the start vector, destroyed; w, v, p work vectors. All have whole blocks of four elements, zero past n, in records
 * @param d receives the diagonal; e the off-diagonals, real and imaginary part in turn, from index n − 1 down
 * @param carried null (0) or a vector that is multiplied with all reflectors
 * @param breakdown an off-diagonal not above this ends the reduction
 * @returns the number of levels
 */
export function householderComplex(
  a: usize,
  n: i32,
  u: usize,
  w: usize,
  v: usize,
  p: usize,
  d: usize,
  e: usize,
  carried: usize,
  breakdown: f64,
): i32 {
  const length = (<usize>((n + 3) >> 2)) << 6;
  // The last element of e is that of the start vector: its phase.
  eliminateComplex(u, n, Math.sqrt(squaresComplex(u, length)), e + ((<usize>n - 1) << 4));
  if (carried != 0) reflectComplex(carried, u, length);
  memory.fill(w, 0, length);
  updateAndMultiplyComplex(a, n, u, w, u, p);
  for (let k = n - 1; k >= 0; k--) {
    // The active block is k + 1 wide; u and p hold zeros, or what is never read, beyond it.
    const active = (<usize>((k + 4) >> 2)) << 6;
    rankTwoVectorComplex(u, p, w, active);
    const row = a + 2 * rowStart(k);
    const at = element(k);
    f64.store(
      d + ((<usize>k) << 3),
      f64.load(row + at) - 2 * (f64.load(u + at) * f64.load(w + at) + f64.load(u + at, 16) * f64.load(w + at, 16)),
    );
    if (k == 0) break;
    updatedColumn(row, u, w, at, v, active);
    // What lies past the active block must not enter the next products.
    for (let j = k; j < ((k + 4) >> 2) << 2; j++) store(v + element(j), 0, 0);
    const norm = Math.sqrt(squaresComplex(v, active));
    if (norm <= breakdown) return n - k;
    eliminateComplex(v, k, norm, e + ((<usize>k - 1) << 4));
    store(u + at, 0, 0);
    store(w + at, 0, 0);
    if (carried != 0) reflectComplex(carried, v, active);
    updateAndMultiplyComplex(a, k, u, w, v, p);
    const turn = u;
    u = v;
    v = turn;
  }
  return n;
}

/** Byte offset of the real part of element i; its imaginary part is 16 bytes on. */
function element(i: i32): usize {
  return ((<usize>(i >> 1)) << 5) + ((<usize>(i & 1)) << 3);
}

function store(at: usize, re: f64, im: f64): void {
  f64.store(at, re);
  f64.store(at, im, 16);
}

function lanes(x: v128): f64 {
  return f64x2.extract_lane(x, 0) + f64x2.extract_lane(x, 1);
}

function squaresComplex(x: usize, bytes: usize): f64 {
  let s = f64x2.splat(0);
  for (const end = x + bytes; x < end; x += 16) s = f64x2.add(s, f64x2.mul(v128.load(x), v128.load(x)));
  return lanes(s);
}

/** Replaces the first m elements x, of length `norm`, by the unit vector u with (1 − 2uu†)x = r·e_{m−1}; writes r. */
function eliminateComplex(x: usize, m: i32, norm: f64, r: usize): void {
  const at = x + element(m - 1);
  const re = f64.load(at);
  const im = f64.load(at, 16);
  const lead = Math.sqrt(re * re + im * im);
  // The phase of r is opposite to that of the last element, so nothing cancels.
  const rRe = lead == 0 ? -norm : (-norm * re) / lead;
  const rIm = lead == 0 ? 0 : (-norm * im) / lead;
  store(at, re - rRe, im - rIm);
  f64.store(r, rRe);
  f64.store(r, rIm, 8);
  const factor = f64x2.splat(1 / Math.sqrt(2 * norm * (norm + lead)));
  for (const end = x + ((<usize>((m + 3) >> 2)) << 6); x < end; x += 16) v128.store(x, f64x2.mul(factor, v128.load(x)));
}

/** x ← x − 2u(u†x) */
function reflectComplex(x: usize, u: usize, bytes: usize): void {
  let re = f64x2.splat(0);
  let im = f64x2.splat(0);
  for (let i: usize = 0; i < bytes; i += 32) {
    const uRe = v128.load(u + i);
    const uIm = v128.load(u + i, 16);
    const xRe = v128.load(x + i);
    const xIm = v128.load(x + i, 16);
    re = f64x2.add(re, f64x2.add(f64x2.mul(uRe, xRe), f64x2.mul(uIm, xIm)));
    im = f64x2.add(im, f64x2.sub(f64x2.mul(uRe, xIm), f64x2.mul(uIm, xRe)));
  }
  re = f64x2.splat(2 * lanes(re));
  im = f64x2.splat(2 * lanes(im));
  for (let i: usize = 0; i < bytes; i += 32) {
    const uRe = v128.load(u + i);
    const uIm = v128.load(u + i, 16);
    v128.store(x + i, f64x2.sub(v128.load(x + i), f64x2.sub(f64x2.mul(uRe, re), f64x2.mul(uIm, im))));
    v128.store(x + i, f64x2.sub(v128.load(x + i, 16), f64x2.add(f64x2.mul(uRe, im), f64x2.mul(uIm, re))), 16);
  }
}

/** w = 2(p − (u†p)u), p the product with u; u†p is real. */
function rankTwoVectorComplex(u: usize, p: usize, w: usize, bytes: usize): void {
  let s = f64x2.splat(0);
  for (let i: usize = 0; i < bytes; i += 16) s = f64x2.add(s, f64x2.mul(v128.load(u + i), v128.load(p + i)));
  const factor = f64x2.splat(lanes(s));
  const two = f64x2.splat(2);
  for (let i: usize = 0; i < bytes; i += 16) {
    v128.store(w + i, f64x2.mul(two, f64x2.sub(v128.load(p + i), f64x2.mul(factor, v128.load(u + i)))));
  }
}

/** v_j = (A_kj)* − u_j w_k* − w_j u_k*, element k at byte offset `at`. */
function updatedColumn(row: usize, u: usize, w: usize, at: usize, v: usize, bytes: usize): void {
  const uRe = v128.load64_splat(u + at);
  const uIm = v128.load64_splat(u + at, 16);
  const wRe = v128.load64_splat(w + at);
  const wIm = v128.load64_splat(w + at, 16);
  for (let j: usize = 0; j < bytes; j += 32) {
    const a = v128.load(u + j);
    const b = v128.load(u + j, 16);
    const c = v128.load(w + j);
    const d = v128.load(w + j, 16);
    const re = f64x2.add(f64x2.add(f64x2.mul(a, wRe), f64x2.mul(b, wIm)), f64x2.add(f64x2.mul(c, uRe), f64x2.mul(d, uIm)));
    const im = f64x2.add(f64x2.sub(f64x2.mul(b, wRe), f64x2.mul(a, wIm)), f64x2.sub(f64x2.mul(d, uRe), f64x2.mul(c, uIm)));
    v128.store(v + j, f64x2.sub(v128.load(row + j), re));
    v128.store(v + j, f64x2.neg(f64x2.add(v128.load(row + j, 16), im)), 16);
  }
}

/** A ← A − uw† − wu† on the first m rows (in whole blocks), and p = Av of the result. */
function updateAndMultiplyComplex(a: usize, m: i32, u: usize, w: usize, v: usize, p: usize): void {
  const blocks = (m + 3) >> 2;
  memory.fill(p, 0, (<usize>blocks) << 6);
  for (let i = 0; i < blocks << 2; i++) {
    const row = a + 2 * rowStart(i);
    const square = (<usize>(i >> 2)) << 6;
    beforeSquare(row, square, element(i), u, w, v, p);
    acrossSquare(row + square, element(i), u, w, v, p, square);
  }
}

/** One row, whose element stands at byte offset i in the vectors, against the columns before its diagonal square. */
export function beforeSquare(row: usize, end: usize, i: usize, u: usize, w: usize, v: usize, p: usize): void {
  const uRe = v128.load64_splat(u + i);
  const uIm = v128.load64_splat(u + i, 16);
  const wRe = v128.load64_splat(w + i);
  const wIm = v128.load64_splat(w + i, 16);
  const vRe = v128.load64_splat(v + i);
  const vIm = v128.load64_splat(v + i, 16);
  let sumRe = f64x2.splat(0);
  let sumIm = f64x2.splat(0);
  for (let j: usize = 0; j < end; j += 32) {
    let c = v128.load(w + j);
    let d = v128.load(w + j, 16);
    let re = f64x2.add(f64x2.mul(uRe, c), f64x2.mul(uIm, d));
    let im = f64x2.sub(f64x2.mul(uIm, c), f64x2.mul(uRe, d));
    c = v128.load(u + j);
    d = v128.load(u + j, 16);
    re = f64x2.add(re, f64x2.add(f64x2.mul(wRe, c), f64x2.mul(wIm, d)));
    im = f64x2.add(im, f64x2.sub(f64x2.mul(wIm, c), f64x2.mul(wRe, d)));
    re = f64x2.sub(v128.load(row + j), re);
    im = f64x2.sub(v128.load(row + j, 16), im);
    v128.store(row + j, re);
    v128.store(row + j, im, 16);
    c = v128.load(v + j);
    d = v128.load(v + j, 16);
    sumRe = f64x2.add(sumRe, f64x2.sub(f64x2.mul(re, c), f64x2.mul(im, d)));
    sumIm = f64x2.add(sumIm, f64x2.add(f64x2.mul(re, d), f64x2.mul(im, c)));
    v128.store(p + j, f64x2.add(v128.load(p + j), f64x2.add(f64x2.mul(re, vRe), f64x2.mul(im, vIm))));
    v128.store(p + j, f64x2.add(v128.load(p + j, 16), f64x2.sub(f64x2.mul(re, vIm), f64x2.mul(im, vRe))), 16);
  }
  store(p + i, f64.load(p + i) + lanes(sumRe), f64.load(p + i, 16) + lanes(sumIm));
}

/** One row against the columns of its diagonal square, which begins at `row` and at byte offset `square` in the vectors. */
function acrossSquare(row: usize, i: usize, u: usize, w: usize, v: usize, p: usize, square: usize): void {
  const uRe = v128.load64_splat(u + i);
  const uIm = v128.load64_splat(u + i, 16);
  const wRe = v128.load64_splat(w + i);
  const wIm = v128.load64_splat(w + i, 16);
  let sumRe = f64x2.splat(0);
  let sumIm = f64x2.splat(0);
  for (let j = square; j < square + 64; j += 32) {
    const a = v128.load(u + j);
    const b = v128.load(u + j, 16);
    const c = v128.load(w + j);
    const d = v128.load(w + j, 16);
    // On the diagonal the two differences cancel exactly.
    const re = f64x2.add(f64x2.add(f64x2.mul(uRe, c), f64x2.mul(uIm, d)), f64x2.add(f64x2.mul(wRe, a), f64x2.mul(wIm, b)));
    const im = f64x2.add(f64x2.sub(f64x2.mul(uIm, c), f64x2.mul(uRe, d)), f64x2.sub(f64x2.mul(wIm, a), f64x2.mul(wRe, b)));
    const xRe = f64x2.sub(v128.load(row), re);
    const xIm = f64x2.sub(v128.load(row, 16), im);
    v128.store(row, xRe);
    v128.store(row, xIm, 16);
    const vRe = v128.load(v + j);
    const vIm = v128.load(v + j, 16);
    sumRe = f64x2.add(sumRe, f64x2.sub(f64x2.mul(xRe, vRe), f64x2.mul(xIm, vIm)));
    sumIm = f64x2.add(sumIm, f64x2.add(f64x2.mul(xRe, vIm), f64x2.mul(xIm, vRe)));
    row += 32;
  }
  store(p + i, f64.load(p + i) + lanes(sumRe), f64.load(p + i, 16) + lanes(sumIm));
}
