/**
 * One averaged monitored step, R ← X∘(R − c1ᵀ − 1c†), with û = R v gathered on the way; see src/statistics/averaged.ts for the meaning.
 *
 * Both matrices are Hermitian, kept as lower triangles in rows in blocks of four (vectors.ts), real and imaginary parts in turn: two of
 * one, two of the other. A diagonal square is kept whole, so that its rows are complete.
 */

/**
 * @param n levels; vectors have whole blocks of four elements, with zeros past n
 * @param x, r matrices as above, with 2·rowStart(n rounded up) doubles each
 * @param v weights
 * @param c, u real plane, then imaginary plane; c is the last measurement and is replaced by the next one
 * @param kappa amplitude reduction κ of a measurement
 * @param out receives s = v·û, the probability of a click by a perfect detector, and what remains: Σ v (R_ii − 2 Re c_i)
 */
export function averagedStep(n: i32, x: usize, r: usize, v: usize, c: usize, u: usize, kappa: f64, out: usize): void {
  const blocks = (n + 3) >> 2;
  const plane = (<usize>blocks) << 5;
  memory.fill(u, 0, 2 * plane);
  pass(blocks, x, r, v, c, u, plane);

  let s = f64x2.splat(0);
  for (let i: usize = 0; i < plane; i += 16) s = f64x2.add(s, f64x2.mul(v128.load(v + i), v128.load(u + i)));
  const sum = f64x2.extract_lane(s, 0) + f64x2.extract_lane(s, 1);
  const factor = f64x2.splat(kappa);
  const half = f64x2.splat(0.5 * kappa * sum);
  for (let i: usize = 0; i < plane; i += 16) {
    v128.store(c + i, f64x2.mul(factor, f64x2.sub(v128.load(u + i), half)));
    v128.store(c + plane + i, f64x2.mul(factor, v128.load(u + plane + i)));
  }
  let remaining: f64 = 0;
  let row = r;
  for (let b: usize = 0; b < <usize>blocks; b++) {
    const stride = (b + 1) << 6;
    // Element (i, i) stands in the last square of its row.
    const square = row + (b << 6);
    const at = b << 5;
    remaining += f64.load(v + at) * (f64.load(square) - 2 * f64.load(c + at));
    remaining += f64.load(v + at, 8) * (f64.load(square + stride, 8) - 2 * f64.load(c + at, 8));
    remaining += f64.load(v + at, 16) * (f64.load(square + 2 * stride, 32) - 2 * f64.load(c + at, 16));
    remaining += f64.load(v + at, 24) * (f64.load(square + 3 * stride, 40) - 2 * f64.load(c + at, 24));
    row += 4 * stride;
  }
  f64.store(out, sum);
  f64.store(out, remaining, 8);
}

function pass(blocks: i32, x: usize, r: usize, v: usize, c: usize, u: usize, plane: usize): void {
  for (let b: usize = 0; b < <usize>blocks; b++) {
    const stride = (b + 1) << 6;
    const end = b << 5;
    for (let i = end; i < end + 32; i += 8) {
      oneRow(x, r, v, c, u, plane, i, end);
      squareRow(x + 2 * end, r + 2 * end, v + end, c + end, u, plane, i, c);
      x += stride;
      r += stride;
    }
  }
}

/** Row i against the columns before its diagonal square. */
function oneRow(x: usize, r: usize, v: usize, c: usize, u: usize, plane: usize, i: usize, end: usize): void {
  const ci = v128.load64_splat(c + i);
  const di = v128.load64_splat(c + plane + i);
  const vi = v128.load64_splat(v + i);
  let sumRe = f64x2.splat(0);
  let sumIm = f64x2.splat(0);
  for (let j: usize = 0; j < end; j += 16) {
    const a = f64x2.sub(f64x2.sub(v128.load(r), ci), v128.load(c + j));
    const b = f64x2.add(f64x2.sub(v128.load(r, 16), di), v128.load(c + plane + j));
    const xRe = v128.load(x);
    const xIm = v128.load(x, 16);
    const re = f64x2.sub(f64x2.mul(xRe, a), f64x2.mul(xIm, b));
    const im = f64x2.add(f64x2.mul(xRe, b), f64x2.mul(xIm, a));
    v128.store(r, re);
    v128.store(r, im, 16);
    const vj = v128.load(v + j);
    sumRe = f64x2.add(sumRe, f64x2.mul(re, vj));
    sumIm = f64x2.add(sumIm, f64x2.mul(im, vj));
    v128.store(u + j, f64x2.add(v128.load(u + j), f64x2.mul(re, vi)));
    v128.store(u + plane + j, f64x2.sub(v128.load(u + plane + j), f64x2.mul(im, vi)));
    x += 32;
    r += 32;
  }
  f64.store(u + i, f64.load(u + i) + (f64x2.extract_lane(sumRe, 0) + f64x2.extract_lane(sumRe, 1)));
  f64.store(u + plane + i, f64.load(u + plane + i) + (f64x2.extract_lane(sumIm, 0) + f64x2.extract_lane(sumIm, 1)));
}

/** Row i against the columns of its diagonal square, at which v, c, x and r point here. */
function squareRow(x: usize, r: usize, v: usize, c: usize, u: usize, plane: usize, i: usize, all: usize): void {
  const ci = v128.load64_splat(all + i);
  const di = v128.load64_splat(all + plane + i);
  let sumRe = f64x2.splat(0);
  let sumIm = f64x2.splat(0);
  for (let j: usize = 0; j < 32; j += 16) {
    const a = f64x2.sub(f64x2.sub(v128.load(r), ci), v128.load(c + j));
    const b = f64x2.add(f64x2.sub(v128.load(r, 16), di), v128.load(c + plane + j));
    const xRe = v128.load(x);
    const xIm = v128.load(x, 16);
    const re = f64x2.sub(f64x2.mul(xRe, a), f64x2.mul(xIm, b));
    const im = f64x2.add(f64x2.mul(xRe, b), f64x2.mul(xIm, a));
    v128.store(r, re);
    v128.store(r, im, 16);
    const vj = v128.load(v + j);
    sumRe = f64x2.add(sumRe, f64x2.mul(re, vj));
    sumIm = f64x2.add(sumIm, f64x2.mul(im, vj));
    x += 32;
    r += 32;
  }
  f64.store(u + i, f64.load(u + i) + (f64x2.extract_lane(sumRe, 0) + f64x2.extract_lane(sumRe, 1)));
  f64.store(u + plane + i, f64.load(u + plane + i) + (f64x2.extract_lane(sumIm, 0) + f64x2.extract_lane(sumIm, 1)));
}
