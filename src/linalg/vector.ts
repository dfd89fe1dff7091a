/** Inner products and norms of split complex vectors. Lengths must agree; nothing is checked. */
import type { StateVector } from './matrix.js';

/** <a|b> = Σ a_k* b_k as [real, imaginary]. */
export function innerProduct(a: StateVector, b: StateVector): [number, number] {
  let re = 0;
  let im = 0;
  for (let k = 0; k < a.re.length; k += 1) {
    const aIm = a.im === null ? 0 : a.im[k];
    const bIm = b.im === null ? 0 : b.im[k];
    re += a.re[k] * b.re[k] + aIm * bIm;
    im += a.re[k] * bIm - aIm * b.re[k];
  }
  return [re, im];
}

/** Σ |a_k|². Overflows above 1e154; states and scaled vectors stay far below. */
export function squaredNorm(a: StateVector): number {
  return innerProduct(a, a)[0];
}

/** A zero vector, with an imaginary plane where asked for. */
export function zeroVector(length: number, complex: boolean): StateVector {
  return { re: new Float64Array(length), im: complex ? new Float64Array(length) : null };
}
