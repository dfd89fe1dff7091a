/**
 * Householder reduction of a real symmetric matrix from its last index up; the layout and the callers' duties stand in ../layout.ts.
 *
 * The scheme is that of ../../reference/householder-real.ts (a reflector, then one pass that updates the matrix and multiplies it with the
 * next reflector), turned round: the vector that is reduced is a row, and what is left of the matrix is always the front of its storage.
 * Two rows by four columns are worked on at once: what that needs just fits into the sixteen vector registers of x86.
 */
import { dot, eliminate, rowStart, scaleBy, squares, subtractScaled } from './vectors';

/**
 * @param a rows in blocks of four, scaled to norm one; destroyed
 * @param n dimension
 * @param u the start vector, destroyed; w, v, p work vectors. All have whole blocks of four elements, zero past n
 * @param d, e receive the diagonal and the signed off-diagonals, from index n − 1 down
 * @param carried `planes` vectors, each as long as u, that are multiplied with all reflectors
 * @param breakdown an off-diagonal not above this ends the reduction
 * @returns the number of levels
 */
export function householderReal(
  a: usize,
  n: i32,
  u: usize,
  w: usize,
  v: usize,
  p: usize,
  d: usize,
  e: usize,
  carried: usize,
  planes: i32,
  breakdown: f64,
): i32 {
  const length = (<usize>((n + 3) >> 2)) << 5;
  // The last element of e is that of the start vector: its sign.
  f64.store(e + ((<usize>n - 1) << 3), eliminate(u, n));
  reflect(carried, planes, length, u);
  memory.fill(w, 0, length);
  updateAndMultiply(a, n, u, w, u, p);
  for (let k = n - 1; k >= 0; k--) {
    // The active block is k + 1 wide; u and p hold zeros, or what is never read, beyond it.
    const blocks = (k + 4) >> 2;
    rankTwoVector(u, p, w, blocks);
    const at = (<usize>k) << 3;
    const uk = f64.load(u + at);
    const wk = f64.load(w + at);
    f64.store(d + at, f64.load(a + rowStart(k) + at) - 2 * uk * wk);
    if (k == 0) break;
    updatedRow(a + rowStart(k), u, w, uk, wk, v, blocks);
    // What lies past the active block must not enter the next products.
    for (let j = k; j < blocks << 2; j++) f64.store(v + ((<usize>j) << 3), 0);
    if (Math.sqrt(squares(v, (k + 3) >> 2)) <= breakdown) return n - k;
    f64.store(e + at - 8, eliminate(v, k));
    f64.store(u + at, 0);
    f64.store(w + at, 0);
    reflect(carried, planes, length, v, (k + 3) >> 2);
    updateAndMultiply(a, k, u, w, v, p);
    const turn = u;
    u = v;
    v = turn;
  }
  return n;
}

function reflect(carried: usize, planes: i32, length: usize, u: usize, blocks: i32 = <i32>(length >> 5)): void {
  for (let plane = 0; plane < planes; plane++) {
    subtractScaled(carried, 2 * dot(carried, u, blocks), u, blocks);
    carried += length;
  }
}

/** w = 2(p − (u·p)u), p the product with u. */
function rankTwoVector(u: usize, p: usize, w: usize, blocks: i32): void {
  const factor = f64x2.splat(dot(u, p, blocks));
  const two = f64x2.splat(2);
  for (const end = u + ((<usize>blocks) << 5); u < end; u += 16) {
    v128.store(w, f64x2.mul(two, f64x2.sub(v128.load(p), f64x2.mul(factor, v128.load(u)))));
    p += 16;
    w += 16;
  }
}

/** v = row − wk·u − uk·w */
function updatedRow(row: usize, u: usize, w: usize, uk: f64, wk: f64, v: usize, blocks: i32): void {
  const us = f64x2.splat(uk);
  const ws = f64x2.splat(wk);
  for (const end = u + ((<usize>blocks) << 5); u < end; u += 16) {
    v128.store(v, f64x2.sub(v128.load(row), f64x2.add(f64x2.mul(us, v128.load(w)), f64x2.mul(ws, v128.load(u)))));
    row += 16;
    w += 16;
    v += 16;
  }
}

/** A ← A − uwᵀ − wuᵀ on the first m rows (in whole blocks), and p = Av of the result. */
function updateAndMultiply(a: usize, m: i32, u: usize, w: usize, v: usize, p: usize): void {
  const blocks = (m + 3) >> 2;
  memory.fill(p, 0, (<usize>blocks) << 5);
  for (let b = 0; b < blocks; b++) {
    const stride = (<usize>b + 1) << 5;
    const row = a + rowStart(b << 2);
    const i = (<usize>b) << 5;
    twoRows(row, stride, i, i, u, w, v, p);
    twoRows(row + 2 * stride, stride, i, i + 16, u, w, v, p);
    diagonalBlock(row + i, stride, u + i, w + i, v + i, p + i);
  }
}

/** The two rows at byte offset i against the columns before the diagonal block. */
export function twoRows(r0: usize, stride: usize, end: usize, i: usize, u: usize, w: usize, v: usize, p: usize): void {
  const r1 = r0 + stride;
  const u0 = v128.load64_splat(u + i);
  const u1 = v128.load64_splat(u + i, 8);
  const w0 = v128.load64_splat(w + i);
  const w1 = v128.load64_splat(w + i, 8);
  const v0 = v128.load64_splat(v + i);
  const v1 = v128.load64_splat(v + i, 8);
  let s0 = f64x2.splat(0);
  let s1 = f64x2.splat(0);
  for (let j: usize = 0; j < end; j += 32) {
    let uj = v128.load(u + j);
    let wj = v128.load(w + j);
    let vj = v128.load(v + j);
    let x = f64x2.sub(v128.load(r0 + j), f64x2.add(f64x2.mul(u0, wj), f64x2.mul(w0, uj)));
    let y = f64x2.sub(v128.load(r1 + j), f64x2.add(f64x2.mul(u1, wj), f64x2.mul(w1, uj)));
    v128.store(r0 + j, x);
    v128.store(r1 + j, y);
    s0 = f64x2.add(s0, f64x2.mul(x, vj));
    s1 = f64x2.add(s1, f64x2.mul(y, vj));
    v128.store(p + j, f64x2.add(v128.load(p + j), f64x2.add(f64x2.mul(x, v0), f64x2.mul(y, v1))));
    uj = v128.load(u + j, 16);
    wj = v128.load(w + j, 16);
    vj = v128.load(v + j, 16);
    x = f64x2.sub(v128.load(r0 + j, 16), f64x2.add(f64x2.mul(u0, wj), f64x2.mul(w0, uj)));
    y = f64x2.sub(v128.load(r1 + j, 16), f64x2.add(f64x2.mul(u1, wj), f64x2.mul(w1, uj)));
    v128.store(r0 + j, x, 16);
    v128.store(r1 + j, y, 16);
    s0 = f64x2.add(s0, f64x2.mul(x, vj));
    s1 = f64x2.add(s1, f64x2.mul(y, vj));
    v128.store(p + j, f64x2.add(v128.load(p + j, 16), f64x2.add(f64x2.mul(x, v0), f64x2.mul(y, v1))), 16);
  }
  const sums = f64x2.add(
    i8x16.shuffle(s0, s1, 0, 1, 2, 3, 4, 5, 6, 7, 16, 17, 18, 19, 20, 21, 22, 23),
    i8x16.shuffle(s0, s1, 8, 9, 10, 11, 12, 13, 14, 15, 24, 25, 26, 27, 28, 29, 30, 31),
  );
  v128.store(p + i, f64x2.add(v128.load(p + i), sums));
}

/** The four by four block on the diagonal, of which both triangles are kept. */
function diagonalBlock(row: usize, stride: usize, u: usize, w: usize, v: usize, p: usize): void {
  const ul = v128.load(u);
  const uh = v128.load(u, 16);
  const wl = v128.load(w);
  const wh = v128.load(w, 16);
  const vl = v128.load(v);
  const vh = v128.load(v, 16);
  for (let i: usize = 0; i < 32; i += 8) {
    const ui = v128.load64_splat(u + i);
    const wi = v128.load64_splat(w + i);
    const x = f64x2.sub(v128.load(row), f64x2.add(f64x2.mul(ui, wl), f64x2.mul(wi, ul)));
    const y = f64x2.sub(v128.load(row, 16), f64x2.add(f64x2.mul(ui, wh), f64x2.mul(wi, uh)));
    v128.store(row, x);
    v128.store(row, y, 16);
    const s = f64x2.add(f64x2.mul(x, vl), f64x2.mul(y, vh));
    f64.store(p + i, f64.load(p + i) + (f64x2.extract_lane(s, 0) + f64x2.extract_lane(s, 1)));
    row += stride;
  }
}
