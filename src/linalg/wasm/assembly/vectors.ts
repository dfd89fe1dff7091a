/** Vector arithmetic on whole blocks of four doubles; elements past a vector's length are zero. Addresses are in bytes. */

/** Byte offset of row i: rows come in blocks of four that end with the block's diagonal square, so that every row begins on 32 bytes. */
export function rowStart(i: i32): usize {
  const b = <usize>(i >> 2);
  return ((b * (b + 1)) << 6) + ((<usize>(i & 3) * (b + 1)) << 5);
}

export function dot(x: usize, y: usize, blocks: i32): f64 {
  let s = f64x2.splat(0);
  let t = f64x2.splat(0);
  for (const end = x + ((<usize>blocks) << 5); x < end; x += 32) {
    s = f64x2.add(s, f64x2.mul(v128.load(x), v128.load(y)));
    t = f64x2.add(t, f64x2.mul(v128.load(x, 16), v128.load(y, 16)));
    y += 32;
  }
  s = f64x2.add(s, t);
  return f64x2.extract_lane(s, 0) + f64x2.extract_lane(s, 1);
}

export function squares(x: usize, blocks: i32): f64 {
  return dot(x, x, blocks);
}

/** x ← factor·x */
export function scaleBy(x: usize, factor: f64, blocks: i32): void {
  const f = f64x2.splat(factor);
  for (const end = x + ((<usize>blocks) << 5); x < end; x += 16) v128.store(x, f64x2.mul(f, v128.load(x)));
}

/** x ← x − factor·y */
export function subtractScaled(x: usize, factor: f64, y: usize, blocks: i32): void {
  const f = f64x2.splat(factor);
  for (const end = x + ((<usize>blocks) << 5); x < end; x += 16) {
    v128.store(x, f64x2.sub(v128.load(x), f64x2.mul(f, v128.load(y))));
    y += 16;
  }
}

/**
 * Replaces the first m elements x by the unit vector u with (1 − 2uuᵀ)x = r·e_{m−1} and returns r. The sign of r avoids cancellation.
 */
export function eliminate(x: usize, m: i32): f64 {
  const blocks = (m + 3) >> 2;
  const at = x + ((<usize>m - 1) << 3);
  const norm = Math.sqrt(squares(x, blocks));
  const last = f64.load(at);
  const r = last < 0 ? norm : -norm;
  f64.store(at, last - r);
  scaleBy(x, 1 / Math.sqrt(2 * norm * (norm + Math.abs(last))), blocks);
  return r;
}

/** The sum of the lanes of x, and that of y. */
export function bothSums(x: v128, y: v128): v128 {
  const low = i8x16.shuffle(x, y, 0, 1, 2, 3, 4, 5, 6, 7, 16, 17, 18, 19, 20, 21, 22, 23);
  const high = i8x16.shuffle(x, y, 8, 9, 10, 11, 12, 13, 14, 15, 24, 25, 26, 27, 28, 29, 30, 31);
  return f64x2.add(low, high);
}
