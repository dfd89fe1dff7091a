/**
 * Eigenvalues of a symmetric tridiagonal matrix by the root-free QL method (Pal, Walker and Kahan), with rows carried along.
 *
 * Source: The Symmetric Eigenvalue Problem, Classics in Applied Mathematics 20 (1998), 10.1137/1.9781611971163, section 8.15 (from memory).
 * The recurrence runs on squares of cosines and sines; the rotations of the rows take their roots, and the signs are those of the method
 * with roots: with off-diagonals that are not negative all sines are not negative, and a cosine has the sign of g = γ/(cosine before).
 * p = γ²/c is formed as γ²(r/p): that division runs beside the one for c and shortens the chain every rotation waits for.
 */

/** Cosines squared below this are zero: γ²/c would overflow long before anything of size ε were lost. */
const NO_COSINE: f64 = 1e-280;

/**
 * @param n dimension
 * @param d diagonal, scaled to norm one; receives the eigenvalues, unordered
 * @param e squared off-diagonals, n elements, the last one unused; destroyed
 * @param rows `pairs` ≥ 1 arrays of n pairs of elements, one of each of two rows; replaced by rows times eigenvectors
 * @param rotations room for n pairs; used where there is more than one pair of rows
 * @param floor squared off-diagonals not above this are zero
 * @returns −1, or the first level that did not converge within `most` sweeps
 */
export function tridiagonalQl(n: i32, d: usize, e: usize, rows: usize, pairs: i32, rotations: usize, floor: f64, most: i32): i32 {
  for (let first = 0; first < n; first++) {
    for (;;) {
      const last = blockEnd(n, d, e, first, floor);
      if (last == first) break;
      if (--most < 0) return first;
      const sign = sweep(d, e, rows, rotations, first, last);
      for (let pair = 1; pair < pairs; pair++) rotate(rows + ((<usize>(pair * n)) << 4), rotations, first, last, sign);
    }
  }
  return -1;
}

/** Last index of the unreduced block that begins at `first`. */
function blockEnd(n: i32, d: usize, e: usize, first: i32, floor: f64): i32 {
  const relative: f64 = 0.25 * f64.EPSILON * f64.EPSILON;
  let here = Math.abs(f64.load(d + ((<usize>first) << 3)));
  for (let m = first; m < n - 1; m++) {
    const at = (<usize>m) << 3;
    const next = Math.abs(f64.load(d + at, 8));
    const square = f64.load(e + at);
    const sum = here + next;
    if (square <= floor || square <= relative * sum * sum) return m;
    here = next;
  }
  return n - 1;
}

/** One sweep with the shift of the leading 2 × 2 block, from `last` up to `first`; rotates the first pair of rows and keeps the rotations. */
function sweep(d: usize, e: usize, rows: usize, rotations: usize, first: i32, last: i32): f64 {
  const low = (<usize>first) << 3;
  const root = Math.sqrt(f64.load(e + low));
  const half = (f64.load(d + low, 8) - f64.load(d + low)) / (2 * root);
  const shift = f64.load(d + low) - root / (half + copysign(Math.sqrt(half * half + 1), half));

  let c: f64 = 1;
  let s: f64 = 0;
  let gamma = f64.load(d + ((<usize>last) << 3)) - shift;
  let p = gamma * gamma;
  let sign = copysign<f64>(1, gamma);
  let signBefore: f64 = 1;
  let high = v128.load(rows + ((<usize>last) << 4));
  for (let i = last - 1; i >= first; i--) {
    const at = (<usize>i) << 3;
    const square = f64.load(e + at);
    const r = p + square;
    if (i != last - 1) f64.store(e + at, s * r, 8);
    const cBefore = c;
    c = p / r;
    s = square / r;
    const stretch = r / p;
    const gammaBefore = gamma;
    const alpha = f64.load(d + at);
    gamma = c * (alpha - shift) - s * gammaBefore;
    f64.store(d + at, gammaBefore + (alpha - gamma), 8);

    const roots = f64x2.sqrt(f64x2.replace_lane(f64x2.splat(c), 1, s));
    const rotation = f64x2.replace_lane(roots, 0, copysign(f64x2.extract_lane(roots, 0), sign));
    const cosine = i8x16.shuffle(rotation, rotation, 0, 1, 2, 3, 4, 5, 6, 7, 0, 1, 2, 3, 4, 5, 6, 7);
    const sine = i8x16.shuffle(rotation, rotation, 8, 9, 10, 11, 12, 13, 14, 15, 8, 9, 10, 11, 12, 13, 14, 15);
    v128.store(rotations + 2 * at, rotation);
    const x = v128.load(rows + 2 * at);
    v128.store(rows + 2 * at, f64x2.add(f64x2.mul(sine, x), f64x2.mul(cosine, high)), 16);
    high = f64x2.sub(f64x2.mul(cosine, x), f64x2.mul(sine, high));

    const usual = c > NO_COSINE;
    p = usual ? gamma * gamma * stretch : cBefore * square;
    const next = usual ? copysign<f64>(1, gamma) * sign : -signBefore;
    signBefore = sign;
    sign = next;
  }
  f64.store(e + low, s * p);
  f64.store(d + low, shift + gamma);
  // The off-diagonal that is left has the sign of g; turning the first basis vector makes it positive.
  v128.store(rows + 2 * low, f64x2.mul(f64x2.splat(sign), high));
  return sign;
}

/** The rotations of the last sweep, applied to another pair of rows. */
function rotate(rows: usize, rotations: usize, first: i32, last: i32, sign: f64): void {
  let high = v128.load(rows + ((<usize>last) << 4));
  for (let i = last - 1; i >= first; i--) {
    const at = (<usize>i) << 4;
    const cosine = v128.load64_splat(rotations + at);
    const sine = v128.load64_splat(rotations + at, 8);
    const x = v128.load(rows + at);
    v128.store(rows + at, f64x2.add(f64x2.mul(sine, x), f64x2.mul(cosine, high)), 16);
    high = f64x2.sub(f64x2.mul(cosine, x), f64x2.mul(sine, high));
  }
  v128.store(rows + ((<usize>first) << 4), f64x2.mul(f64x2.splat(sign), high));
}
