/**
 * The WebAssembly kernel: the reference kernel's methods on 128-bit vectors. What it does not have, and what lies beyond its addresses
 * (matrices of more than 32,000 rows, 23,000 complex ones), is done by the reference kernel; which one does it depends on the arguments alone.
 */
import { isComplexPair } from '../apply.js';
import type { SpectralKernel } from '../kernel.js';
import { referenceKernel } from '../reference/reference-kernel.js';
import { householderComplex, householderComplexBytes } from './householder-complex.js';
import { householderReal, householderRealBytes } from './householder-real.js';
import { lanczos, lanczosBytes } from './lanczos.js';
import { tridiagonalEigen, tridiagonalEigenBytes } from './tridiagonal-ql.js';
import { fits } from './workspace.js';

/**
 * Between these dimensions Lanczos to the end beats Householder (measured with seven elements a row: 0.8 of the time at 2000, 1.0 at 1000);
 * beyond them its basis, twice the triangle, would be half a gigabyte.
 */
const WHOLE_FROM = 1200;
const WHOLE_TO = 8000;

/** Where `kernelsRun()`; see `SpectralKernel`. */
export const wasmKernel: SpectralKernel = {
  name: 'simd',
  householder(matrix, start, carried) {
    const complex = isComplexPair(matrix, start);
    if (!fits((complex ? householderComplexBytes : householderRealBytes)(matrix.dimension))) {
      return referenceKernel.householder(matrix, start, carried);
    }
    return (complex ? householderComplex : householderReal)(matrix, start, carried);
  },
  lanczos(matrix, start, carried, maximumSteps) {
    const here =
      matrix.kind === 'sparse' && !isComplexPair(matrix, start) && fits(lanczosBytes(matrix.dimension, matrix.re.length, maximumSteps));
    return here ? lanczos(matrix, start, carried, maximumSteps) : referenceKernel.lanczos(matrix, start, carried, maximumSteps);
  },
  lanczosLimit: (dimension, plain) => (plain && dimension >= WHOLE_FROM && dimension <= WHOLE_TO ? dimension : Math.ceil(dimension / 4)),
  eigen(diagonal, offDiagonal, rows) {
    const here = fits(tridiagonalEigenBytes(diagonal.length, rows.length));
    return here ? tridiagonalEigen(diagonal, offDiagonal, rows) : referenceKernel.eigen(diagonal, offDiagonal, rows);
  },
};
