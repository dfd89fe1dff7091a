/**
 * Lanczos iteration with a real sparse matrix and partial reorthogonalisation.
 *
 * Source: The Lanczos algorithm with partial reorthogonalization, Mathematics of Computation 42, 115 (1984),
 * 10.1090/S0025-5718-1984-0725988-X (from memory). A recurrence estimates ω_ki = q_k·q_i for all i < k; only where one of them has grown
 * past a threshold is the next vector orthogonalised against all before it, and the one after it once more, as two neighbours determine
 * what follows. As long as no |ω| exceeds √ε, the computed T is that of an exactly orthogonal basis to rounding.
 */
import { dot, scaleBy, subtractScaled } from './vectors';

/** Set where the next vector is to be orthogonalised whatever the estimates are. */
const FORCED: usize = 0;
/** The length of the last residual. */
const RESIDUAL: usize = 8;

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
 * @param state two numbers, zero before step 0; the second one is the length of the last residual
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
      const worst = estimate(k, alpha, beta, length, now, next, left);
      const forced = f64.load(state + FORCED) != 0;
      if (worst > threshold || forced) {
        length = orthogonalise(basis, stride, k + 1, w, length, breakdown, blocks);
        for (let i = 0; i <= k; i++) f64.store(next + ((<usize>i) << 3), left);
        f64.store(state + FORCED, forced ? 0 : 1);
      }
    }
    f64.store(state + RESIDUAL, length);
    if (length <= breakdown) return -(k + 1);
    f64.store(beta + at, length);
    const fresh = q + stride;
    memory.copy(fresh, w, stride);
    scaleBy(fresh, 1 / length, blocks);
  }
  return to;
}

/** w = Hq */
function multiply(n: i32, rows: usize, columns: usize, values: usize, q: usize, w: usize): void {
  let k = <usize>i32.load(rows);
  for (let i: usize = 0; i < <usize>n; i++) {
    const end = <usize>i32.load(rows + (i << 2), 4);
    let sum: f64 = 0;
    for (; k < end; k++) sum += f64.load(values + (k << 3)) * f64.load(q + ((<usize>i32.load(columns + (k << 2))) << 3));
    f64.store(w + (i << 3), sum);
  }
}

/** Replaces ω of vector k − 1 by that of vector k + 1 and returns the largest |ω| of it. */
function estimate(k: i32, alpha: usize, beta: usize, length: f64, now: usize, next: usize, left: f64): f64 {
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

/** Orthogonalises w against the first `count` vectors until a pass leaves it nearly as long as it was; its length. */
function orthogonalise(basis: usize, stride: usize, count: i32, w: usize, length: f64, breakdown: f64, blocks: i32): f64 {
  for (let pass = 0; pass < 5; pass++) {
    let q = basis;
    let k = 0;
    for (; k + 3 < count; k += 4) {
      fourAtOnce(q, stride, w, blocks);
      q += 4 * stride;
    }
    for (; k < count; k++) {
      subtractScaled(w, dot(q, w, blocks), q, blocks);
      q += stride;
    }
    const after = Math.sqrt(dot(w, w, blocks));
    const enough = after > 0.7 * length || after <= breakdown;
    length = after;
    if (enough) break;
  }
  return length;
}

/** Four vectors are read once for their overlaps and, still in cache, once for the subtraction. */
function fourAtOnce(q0: usize, stride: usize, w: usize, blocks: i32): void {
  const q1 = q0 + stride;
  const q2 = q1 + stride;
  const q3 = q2 + stride;
  let s0 = f64x2.splat(0);
  let s1 = f64x2.splat(0);
  let s2 = f64x2.splat(0);
  let s3 = f64x2.splat(0);
  for (let i: usize = 0; i < stride; i += 16) {
    const x = v128.load(w + i);
    s0 = f64x2.add(s0, f64x2.mul(x, v128.load(q0 + i)));
    s1 = f64x2.add(s1, f64x2.mul(x, v128.load(q1 + i)));
    s2 = f64x2.add(s2, f64x2.mul(x, v128.load(q2 + i)));
    s3 = f64x2.add(s3, f64x2.mul(x, v128.load(q3 + i)));
  }
  s0 = f64x2.splat(f64x2.extract_lane(s0, 0) + f64x2.extract_lane(s0, 1));
  s1 = f64x2.splat(f64x2.extract_lane(s1, 0) + f64x2.extract_lane(s1, 1));
  s2 = f64x2.splat(f64x2.extract_lane(s2, 0) + f64x2.extract_lane(s2, 1));
  s3 = f64x2.splat(f64x2.extract_lane(s3, 0) + f64x2.extract_lane(s3, 1));
  for (let i: usize = 0; i < stride; i += 16) {
    const first = f64x2.add(f64x2.mul(s0, v128.load(q0 + i)), f64x2.mul(s1, v128.load(q1 + i)));
    const second = f64x2.add(f64x2.mul(s2, v128.load(q2 + i)), f64x2.mul(s3, v128.load(q3 + i)));
    v128.store(w + i, f64x2.sub(v128.load(w + i), f64x2.add(first, second)));
  }
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
