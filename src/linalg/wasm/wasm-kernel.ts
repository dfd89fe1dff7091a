/**
 * The WebAssembly kernel: the reference kernel's methods on 128-bit vectors. What it does not have, and what lies beyond its addresses
 * (real matrices of more than 32,000 rows), is done by the reference kernel; which one does it depends on the arguments alone.
 */
import { isComplexPair } from '../apply.js';
import type { SpectralKernel } from '../kernel.js';
import { referenceKernel } from '../reference/reference-kernel.js';
import { householderReal, householderRealBytes } from './householder-real.js';
import { lanczos, lanczosBytes } from './lanczos.js';
import { tridiagonalEigen, tridiagonalEigenBytes } from './tridiagonal-ql.js';
import { fits } from './workspace.js';

/** Where `kernelsRun()`; see `SpectralKernel`. */
export const wasmKernel: SpectralKernel = {
  name: 'simd',
  householder(matrix, start, carried) {
    const here = !isComplexPair(matrix, start) && fits(householderRealBytes(matrix.dimension));
    return here ? householderReal(matrix, start, carried) : referenceKernel.householder(matrix, start, carried);
  },
  lanczos(matrix, start, carried, maximumSteps) {
    const here =
      matrix.kind === 'sparse' && !isComplexPair(matrix, start) && fits(lanczosBytes(matrix.dimension, matrix.re.length, maximumSteps));
    return here ? lanczos(matrix, start, carried, maximumSteps) : referenceKernel.lanczos(matrix, start, carried, maximumSteps);
  },
  eigen(diagonal, offDiagonal, rows) {
    const here = fits(tridiagonalEigenBytes(diagonal.length, rows.length));
    return here ? tridiagonalEigen(diagonal, offDiagonal, rows) : referenceKernel.eigen(diagonal, offDiagonal, rows);
  },
};
