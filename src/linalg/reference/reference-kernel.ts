/** The TypeScript kernel: every platform has it, and every other kernel is held to it. */
import { isComplexPair } from '../apply.js';
import type { SpectralKernel } from '../kernel.js';
import { householderComplex } from './householder-complex.js';
import { householderReal } from './householder-real.js';
import { lanczos } from './lanczos.js';
import { tridiagonalEigen } from './tridiagonal-ql.js';

export const referenceKernel: SpectralKernel = {
  name: 'typescript',
  householder: (matrix, start, carried) => (isComplexPair(matrix, start) ? householderComplex : householderReal)(matrix, start, carried),
  lanczos,
  lanczosLimit: (dimension) => Math.ceil(dimension / 4),
  eigen: tridiagonalEigen,
};
