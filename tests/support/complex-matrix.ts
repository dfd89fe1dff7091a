/** Small dense complex matrices for brute-force checks: plain definitions, no care for speed. */
import { randomStream } from '../../src/core/random.js';
import type { Complex, DenseProblem } from './reference-measure.js';

export type ComplexMatrix = readonly (readonly Complex[])[];
export type ComplexVector = readonly Complex[];

export const times = (a: Complex, b: Complex): Complex => [a[0] * b[0] - a[1] * b[1], a[0] * b[1] + a[1] * b[0]];
export const plus = (a: Complex, b: Complex): Complex => [a[0] + b[0], a[1] + b[1]];
export const scaled = (a: Complex, by: number): Complex => [a[0] * by, a[1] * by];
export const conjugate = (a: Complex): Complex => [a[0], -a[1]];

export const apply = (matrix: ComplexMatrix, vector: ComplexVector): ComplexVector =>
  matrix.map((row) => row.reduce<Complex>((sum, value, j) => plus(sum, times(value, vector[j])), [0, 0]));

export const inner = (bra: ComplexVector, ket: ComplexVector): Complex =>
  bra.reduce<Complex>((sum, value, i) => plus(sum, times(conjugate(value), ket[i])), [0, 0]);

export const multiply = (a: ComplexMatrix, b: ComplexMatrix): ComplexMatrix =>
  a.map((row) => b[0].map((_, j) => row.reduce<Complex>((sum, value, k) => plus(sum, times(value, b[k][j])), [0, 0])));

/** exp(−i H τ) by Taylor's series of the scaled matrix and repeated squaring. */
export function propagator({ re, im }: DenseProblem, tau: number): ComplexMatrix {
  const n = re.length;
  const norm = Math.max(...re.map((row, i) => row.reduce((sum, value, j) => sum + Math.hypot(value, im[i][j]), 0))) * Math.abs(tau);
  const squarings = Math.max(0, Math.ceil(Math.log2(norm + 1e-9)) + 3);
  const step = tau / 2 ** squarings;
  const small: ComplexMatrix = re.map((row, i) => row.map((value, j): Complex => [im[i][j] * step, -value * step]));
  const identity: ComplexMatrix = re.map((row, i) => row.map((_, j): Complex => [i === j ? 1 : 0, 0]));
  let result = identity;
  for (let k = 18; k >= 1; k--) {
    const product = multiply(small, result);
    result = identity.map((row, i) => row.map((value, j) => plus(value, scaled(product[i][j], 1 / k))));
  }
  for (let k = 0; k < squarings; k++) result = multiply(result, result);
  return result.length === n ? result : identity;
}

/** Roots of Σ c_k z^k (c_n ≠ 0) by simultaneous iteration. */
export function polynomialRoots(coefficients: readonly Complex[]): readonly Complex[] {
  const degree = coefficients.length - 1;
  const lead = coefficients[degree];
  const size = lead[0] ** 2 + lead[1] ** 2;
  const monic = coefficients.map((value) => scaled(times(value, conjugate(lead)), 1 / size));
  const evaluate = (z: Complex): Complex => monic.reduceRight<Complex>((sum, value) => plus(times(sum, z), value), [0, 0]);
  let roots: Complex[] = Array.from({ length: degree }, (_, k) => [0.4 * Math.cos(2.1 * k + 0.3), 0.9 * Math.sin(2.1 * k + 0.3)]);
  for (let iteration = 0; iteration < 500; iteration++) {
    roots = roots.map((root, i) => {
      const denominator = roots.reduce<Complex>(
        (product, other, j) => (i === j ? product : times(product, [root[0] - other[0], root[1] - other[1]])),
        [1, 0],
      );
      const value = scaled(times(evaluate(root), conjugate(denominator)), 1 / (denominator[0] ** 2 + denominator[1] ** 2));
      return [root[0] - value[0], root[1] - value[1]];
    });
  }
  return roots;
}

/** A random Hermitian matrix and two random states; `prepared` is `detected` itself for a return. */
export function randomProblem(seed: number, size: number, kind: 'return' | 'transition', complex = true): DenseProblem {
  const stream = randomStream(seed, 'problem');
  const re = Array.from({ length: size }, () => new Array<number>(size).fill(0));
  const im = Array.from({ length: size }, () => new Array<number>(size).fill(0));
  for (let i = 0; i < size; i++) {
    re[i][i] = 2 * stream.normal();
    for (let j = 0; j < i; j++) {
      re[i][j] = re[j][i] = stream.normal();
      im[i][j] = complex ? stream.normal() : 0;
      im[j][i] = -im[i][j];
    }
  }
  const state = (): ComplexVector => {
    const raw: Complex[] = Array.from({ length: size }, () => [stream.normal(), complex ? stream.normal() : 0]);
    const norm = Math.sqrt(raw.reduce((sum, [a, b]) => sum + a * a + b * b, 0));
    return raw.map((value) => scaled(value, 1 / norm));
  };
  const detected = state();
  return { re, im, detected, prepared: kind === 'return' ? detected : state() };
}
