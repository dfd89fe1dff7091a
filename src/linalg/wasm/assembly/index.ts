/**
 * The WebAssembly kernels: what the module exports. They are compiled by deploy/build-kernels.mjs.
 *
 * All work on memory that the caller lays out and owns; addresses are in bytes and multiples of 16 (of 8 for plain vectors of doubles).
 * Nothing is checked, allocated or kept between calls. Each hot loop is a function of its own, called many times: the engine replaces
 * baseline code by optimised code between calls, not within one. Those that only one other function calls are exported too, which keeps
 * the compiler from merging them into it.
 */
export { averagedStep } from './averaged';
export { beforeSquare, householderComplex } from './householder-complex';
export { householderReal, twoRows } from './householder-real';
export { cholesky, subtractDots } from './cholesky';
export { estimate, lanczosSteps, multiply, overlaps } from './lanczos';
export { tridiagonalQl } from './tridiagonal-ql';
