/**
 * Cholesky factorisation A = LLᵀ of a real positive definite matrix, row by row in blocks of four (vectors.ts).
 *
 * Every element is a dot product of two rows of L, which are read in order; two rows by four are taken together, so that eight sums share six
 * loads.
 */
import { bothSums, rowStart } from './vectors';

/**
 * @param a lower triangle in rows in blocks of four, both triangles of the squares on the diagonal; rows past n are those of the identity.
 *   Replaced by L; what stands above the diagonal of a square means nothing then
 * @param n dimension
 */
export function cholesky(a: usize, n: i32): void {
  const blocks = (n + 3) >> 2;
  for (let b = 0; b < blocks; b++) {
    const rows = a + rowStart(b << 2);
    const stride = (<usize>b + 1) << 5;
    for (let c = 0; c < b; c++) {
      const others = a + rowStart(c << 2);
      const other = (<usize>c + 1) << 5;
      const length = (<usize>c) << 5;
      subtractDots(rows, rows + stride, others, other, length);
      subtractDots(rows + 2 * stride, rows + 3 * stride, others, other, length);
      for (let r: usize = 0; r < 4; r++) substitute(rows + r * stride + length, others + length, other);
    }
    const length = (<usize>b) << 5;
    subtractDots(rows, rows + stride, rows, stride, length);
    subtractDots(rows + 2 * stride, rows + 3 * stride, rows, stride, length);
    factorSquare(rows + length, stride);
  }
}

/** From the four elements at byte `length` of two rows: their dot products, over the elements before, with four other rows. */
export function subtractDots(r0: usize, r1: usize, q0: usize, stride: usize, length: usize): void {
  const q1 = q0 + stride;
  const q2 = q1 + stride;
  const q3 = q2 + stride;
  let s0 = f64x2.splat(0);
  let s1 = f64x2.splat(0);
  let s2 = f64x2.splat(0);
  let s3 = f64x2.splat(0);
  let t0 = f64x2.splat(0);
  let t1 = f64x2.splat(0);
  let t2 = f64x2.splat(0);
  let t3 = f64x2.splat(0);
  for (let k: usize = 0; k < length; k += 16) {
    const x = v128.load(r0 + k);
    const y = v128.load(r1 + k);
    let q = v128.load(q0 + k);
    s0 = f64x2.add(s0, f64x2.mul(x, q));
    t0 = f64x2.add(t0, f64x2.mul(y, q));
    q = v128.load(q1 + k);
    s1 = f64x2.add(s1, f64x2.mul(x, q));
    t1 = f64x2.add(t1, f64x2.mul(y, q));
    q = v128.load(q2 + k);
    s2 = f64x2.add(s2, f64x2.mul(x, q));
    t2 = f64x2.add(t2, f64x2.mul(y, q));
    q = v128.load(q3 + k);
    s3 = f64x2.add(s3, f64x2.mul(x, q));
    t3 = f64x2.add(t3, f64x2.mul(y, q));
  }
  r0 += length;
  r1 += length;
  v128.store(r0, f64x2.sub(v128.load(r0), bothSums(s0, s1)));
  v128.store(r0, f64x2.sub(v128.load(r0, 16), bothSums(s2, s3)), 16);
  v128.store(r1, f64x2.sub(v128.load(r1), bothSums(t0, t1)));
  v128.store(r1, f64x2.sub(v128.load(r1, 16), bothSums(t2, t3)), 16);
}

/** Four elements x of a row: x ← x L⁻ᵀ, L the square on the diagonal of the rows they belong with. */
function substitute(x: usize, square: usize, stride: usize): void {
  for (let j: usize = 0; j < 4; j++) {
    const row = square + j * stride;
    let value = f64.load(x + (j << 3));
    for (let k: usize = 0; k < j; k++) value -= f64.load(x + (k << 3)) * f64.load(row + (k << 3));
    f64.store(x + (j << 3), value / f64.load(row + (j << 3)));
  }
}

function factorSquare(square: usize, stride: usize): void {
  for (let i: usize = 0; i < 4; i++) {
    const row = square + i * stride;
    for (let j: usize = 0; j <= i; j++) {
      const other = square + j * stride;
      let value = f64.load(row + (j << 3));
      for (let k: usize = 0; k < j; k++) value -= f64.load(row + (k << 3)) * f64.load(other + (k << 3));
      f64.store(row + (j << 3), j == i ? Math.sqrt(value) : value / f64.load(other + (j << 3)));
    }
  }
}
