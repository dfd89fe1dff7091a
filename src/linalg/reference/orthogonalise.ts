/**
 * Gram–Schmidt against an orthonormal basis. Four (complex: two) basis vectors are taken together: each is read once for its overlap and,
 * still in cache, once for the subtraction.
 */

/** w ← w − Σ q_j (q_j·w) over the first `count` basis vectors. */
export function orthogonaliseReal(basis: readonly Float64Array[], count: number, w: Float64Array): void {
  let j = 0;
  for (; j + 3 < count; j += 4) four(basis[j], basis[j + 1], basis[j + 2], basis[j + 3], w);
  for (; j < count; j += 1) {
    const q = basis[j];
    let dot = 0;
    for (let i = 0; i < w.length; i += 1) dot += q[i] * w[i];
    for (let i = 0; i < w.length; i += 1) w[i] -= dot * q[i];
  }
}

function four(q0: Float64Array, q1: Float64Array, q2: Float64Array, q3: Float64Array, w: Float64Array): void {
  const n = w.length;
  let d0 = 0;
  let d1 = 0;
  let d2 = 0;
  let d3 = 0;
  for (let i = 0; i < n; i += 1) {
    const x = w[i];
    d0 += q0[i] * x;
    d1 += q1[i] * x;
    d2 += q2[i] * x;
    d3 += q3[i] * x;
  }
  for (let i = 0; i < n; i += 1) w[i] -= d0 * q0[i] + d1 * q1[i] + (d2 * q2[i] + d3 * q3[i]);
}

/** w ← w − Σ q_j <q_j|w> on split planes. */
export function orthogonaliseComplex(
  basisRe: readonly Float64Array[],
  basisIm: readonly Float64Array[],
  count: number,
  wRe: Float64Array,
  wIm: Float64Array,
): void {
  const n = wRe.length;
  for (let j = 0; j < count; j += 2) {
    const a = basisRe[j];
    const b = basisIm[j];
    const paired = j + 1 < count;
    // An odd last vector is taken with itself; its second overlap is then not used.
    const c = paired ? basisRe[j + 1] : a;
    const d = paired ? basisIm[j + 1] : b;
    let r0 = 0;
    let i0 = 0;
    let r1 = 0;
    let i1 = 0;
    for (let i = 0; i < n; i += 1) {
      const x = wRe[i];
      const y = wIm[i];
      r0 += a[i] * x + b[i] * y;
      i0 += a[i] * y - b[i] * x;
      r1 += c[i] * x + d[i] * y;
      i1 += c[i] * y - d[i] * x;
    }
    if (!paired) r1 = i1 = 0;
    for (let i = 0; i < n; i += 1) {
      wRe[i] -= r0 * a[i] - i0 * b[i] + (r1 * c[i] - i1 * d[i]);
      wIm[i] -= r0 * b[i] + i0 * a[i] + (r1 * d[i] + i1 * c[i]);
    }
  }
}
