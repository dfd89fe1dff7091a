/**
 * Lanczos iteration with a real sparse matrix and partial reorthogonalisation.
 *
 * Source: The Lanczos algorithm with partial reorthogonalization, Mathematics of Computation 42, 115 (1984),
 * 10.1090/S0025-5718-1984-0725988-X (from memory). A recurrence estimates ω_ki = q_k·q_i for all i < k; only where one of them has grown
 * past a threshold are the last vector and the next one orthogonalised against all before them, both in one reading of the basis, as two
 * neighbours determine what follows. As long as no |ω| exceeds √ε, the computed T is that of an exactly orthogonal basis to rounding: what
 * is taken from the last vector lies in the span of those before it. Orthogonalising only where |ω| is large spares next to nothing.
 */
import { dot, scaleBy, subtractScaled } from './vectors';

/** What an orthogonalisation leaves behind, and what one step adds, in units of ε: generous, for a norm of H at most one. */
const LEFT: f64 = 1;
const ADDED: f64 = 2;

/**
 * Steps `from` to `to` − 1, step k making vector k + 1 from vector k.
 * @param n dimension; vectors take whole blocks of four, zeros past n
 * @param rows n + 1 row starts (32 bits), columns (32 bits) and values of a matrix of norm at most one
 * @param basis vectors one after the other; vector 0 is the start vector; room for `to` + 1 of them (n at most)
 * @param alpha, beta receive diagonal and off-diagonals
 * @param even, odd estimates ω of vectors of even and odd number, zero before step 0; each with one number of zero in front
 * @param state receives the length of the last residual
 * @param threshold for |ω|
 * @param breakdown a residual not above this ends the iteration
 * @returns the number of steps done, negative where the iteration has ended: at n, or by a breakdown
 */
export function lanczosSteps(
  n: i32,
  rows: usize,
  columns: usize,
  values: usize,
  basis: usize,
  w: usize,
  alpha: usize,
  beta: usize,
  even: usize,
  odd: usize,
  state: usize,
  from: i32,
  to: i32,
  threshold: f64,
  breakdown: f64,
): i32 {
  const blocks = (n + 3) >> 2;
  const stride = (<usize>blocks) << 5;
  const left = LEFT * f64.EPSILON * Math.sqrt(<f64>n);
  for (let k = from; k < to; k++) {
    const q = basis + <usize>k * stride;
    const at = (<usize>k) << 3;
    multiply(n, rows, columns, values, q, w);
    if (k > 0) subtractScaled(w, f64.load(beta + at - 8), q - stride, blocks);
    let a = dot(q, w, blocks);
    subtractScaled(w, a, q, blocks);
    // Neighbours are kept orthogonal in any case: their estimates take it for granted.
    if (k > 0) subtractScaled(w, dot(q - stride, w, blocks), q - stride, blocks);
    const rest = dot(q, w, blocks);
    subtractScaled(w, rest, q, blocks);
    a += rest;
    f64.store(alpha + at, a);
    if (k + 1 == n) return -n;
    let length = Math.sqrt(dot(w, w, blocks));
    if (length > breakdown) {
      const now = k & 1 ? odd : even;
      const next = k & 1 ? even : odd;
      if (estimate(k, alpha, beta, length, now, next, left) > threshold) {
        length = orthogonalise(basis, stride, k, w, length, breakdown, blocks);
        for (let i: usize = 0; i < <usize>k; i++) {
          f64.store(now + (i << 3), left);
          f64.store(next + (i << 3), left);
        }
      }
    }
    f64.store(state, length);
    if (length <= breakdown) return -(k + 1);
    f64.store(beta + at, length);
    const fresh = q + stride;
    memory.copy(fresh, w, stride);
    scaleBy(fresh, 1 / length, blocks);
  }
  return to;
}

/** w = Hq */
export function multiply(n: i32, rows: usize, columns: usize, values: usize, q: usize, w: usize): void {
  let k = <usize>i32.load(rows);
  for (let i: usize = 0; i < <usize>n; i++) {
    const end = <usize>i32.load(rows + (i << 2), 4);
    let sum: f64 = 0;
    for (; k < end; k++) sum += f64.load(values + (k << 3)) * f64.load(q + ((<usize>i32.load(columns + (k << 2))) << 3));
    f64.store(w + (i << 3), sum);
  }
}

/** Replaces ω of vector k − 1 by that of vector k + 1 and returns the largest |ω| of it. */
export function estimate(k: i32, alpha: usize, beta: usize, length: f64, now: usize, next: usize, left: f64): f64 {
  f64.store(now + ((<usize>k) << 3), 1);
  const a = f64.load(alpha + ((<usize>k) << 3));
  const b = k > 0 ? f64.load(beta + ((<usize>k - 1) << 3)) : 0;
  const added = ADDED * f64.EPSILON;
  const inverse = 1 / length;
  let worst: f64 = 0;
  let before: f64 = 0;
  for (let at: usize = 0; at < (<usize>k) << 3; at += 8) {
    const after = f64.load(beta + at);
    let omega = after * f64.load(now + at, 8) + (f64.load(alpha + at) - a) * f64.load(now + at) - b * f64.load(next + at);
    if (at > 0) omega += before * f64.load(now + at - 8);
    omega = (omega + copysign(added, omega)) * inverse;
    f64.store(next + at, omega);
    worst = Math.max(worst, Math.abs(omega));
    before = after;
  }
  f64.store(next + ((<usize>k) << 3), left * Math.max(1, inverse * b));
  return worst;
}

/**
 * Orthogonalises vector k and w against the vectors before k, then w against vector k; w again until a pass leaves it nearly as long as it
 * was. Returns its length.
 */
function orthogonalise(basis: usize, stride: usize, k: i32, w: usize, length: f64, breakdown: f64, blocks: i32): f64 {
  const last = basis + <usize>k * stride;
  let q = basis;
  for (; q + 4 * stride <= last; q += 4 * stride) fourFromTwo(q, stride, last, w);
  for (; q < last; q += stride) {
    subtractScaled(last, dot(q, last, blocks), q, blocks);
    subtractScaled(w, dot(q, w, blocks), q, blocks);
  }
  subtractScaled(w, dot(last, w, blocks), last, blocks);
  for (let pass = 0; pass < 5; pass++) {
    const after = Math.sqrt(dot(w, w, blocks));
    const enough = after > 0.7 * length || after <= breakdown;
    length = after;
    if (enough) break;
    for (q = basis; q <= last; q += stride) subtractScaled(w, dot(q, w, blocks), q, blocks);
  }
  return length;
}

/** x and y lose their parts along four vectors, which are read once for the overlaps and, still in cache, once for the subtraction. */
function fourFromTwo(q0: usize, stride: usize, x: usize, y: usize): void {
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
  for (let i: usize = 0; i < stride; i += 16) {
    const xi = v128.load(x + i);
    const yi = v128.load(y + i);
    let q = v128.load(q0 + i);
    s0 = f64x2.add(s0, f64x2.mul(xi, q));
    t0 = f64x2.add(t0, f64x2.mul(yi, q));
    q = v128.load(q1 + i);
    s1 = f64x2.add(s1, f64x2.mul(xi, q));
    t1 = f64x2.add(t1, f64x2.mul(yi, q));
    q = v128.load(q2 + i);
    s2 = f64x2.add(s2, f64x2.mul(xi, q));
    t2 = f64x2.add(t2, f64x2.mul(yi, q));
    q = v128.load(q3 + i);
    s3 = f64x2.add(s3, f64x2.mul(xi, q));
    t3 = f64x2.add(t3, f64x2.mul(yi, q));
  }
  s0 = bothLanes(s0);
  s1 = bothLanes(s1);
  s2 = bothLanes(s2);
  s3 = bothLanes(s3);
  t0 = bothLanes(t0);
  t1 = bothLanes(t1);
  t2 = bothLanes(t2);
  t3 = bothLanes(t3);
  for (let i: usize = 0; i < stride; i += 16) {
    let q = v128.load(q0 + i);
    let xi = f64x2.mul(s0, q);
    let yi = f64x2.mul(t0, q);
    q = v128.load(q1 + i);
    xi = f64x2.add(xi, f64x2.mul(s1, q));
    yi = f64x2.add(yi, f64x2.mul(t1, q));
    q = v128.load(q2 + i);
    xi = f64x2.add(xi, f64x2.mul(s2, q));
    yi = f64x2.add(yi, f64x2.mul(t2, q));
    q = v128.load(q3 + i);
    xi = f64x2.add(xi, f64x2.mul(s3, q));
    yi = f64x2.add(yi, f64x2.mul(t3, q));
    v128.store(x + i, f64x2.sub(v128.load(x + i), xi));
    v128.store(y + i, f64x2.sub(v128.load(y + i), yi));
  }
}

/** The sum of the two lanes, in both. */
function bothLanes(x: v128): v128 {
  return f64x2.splat(f64x2.extract_lane(x, 0) + f64x2.extract_lane(x, 1));
}

/** Overlaps of `count` basis vectors with x. */
export function overlaps(basis: usize, count: i32, n: i32, x: usize, out: usize): void {
  const blocks = (n + 3) >> 2;
  for (let k = 0; k < count; k++) {
    f64.store(out, dot(basis, x, blocks));
    basis += (<usize>blocks) << 5;
    out += 8;
  }
}
