import { describe, expect, it } from 'vitest';
import { referenceKernel } from '../../../src/linalg/reference/reference-kernel.js';
import { reduce, structuralDimension } from '../../../src/spectral/reduce.js';
import { basisState, blockadeChain, dimer, randomDense, ring, sparseChain, tridiagonal } from '../../support/matrices.js';

describe('structuralDimension', () => {
  const chain = tridiagonal([1, 2, 3, 4, 5], [1, 1, 0, 1]);

  it('is the unreduced block of an end state, with any phase', () => {
    expect(structuralDimension(chain, basisState(5, 0))).toBe(3);
    expect(structuralDimension(chain, basisState(5, 4))).toBe(2);
    expect(structuralDimension(dimer(7, 1), basisState(8, 7))).toBe(8);
    const turned = { re: new Float64Array(8), im: basisState(8, 0).re };
    expect(structuralDimension(dimer(7, 1), turned)).toBe(8);
    expect(structuralDimension(tridiagonal([3], []), basisState(1, 0))).toBe(1);
  });

  it('is unknown for other states', () => {
    expect(structuralDimension(chain, basisState(5, 1))).toBeNull();
    const both = { re: Float64Array.of(0.6, 0, 0, 0, 0.8), im: null };
    expect(structuralDimension(chain, both)).toBeNull();
  });
});

describe('reduce', () => {
  const method = (...[matrix, state]: Parameters<typeof reduce> extends [infer M, infer S, ...unknown[]] ? [M, S] : never): string =>
    reduce(matrix, state, null, referenceKernel).method;

  it('takes the route of the storage and size', () => {
    expect(method(dimer(150, 1), basisState(151, 70))).toBe('tridiagonal-ql');
    expect(method(randomDense(20, false, 1), basisState(20, 3))).toBe('householder-ql');
    expect(method(ring(12), basisState(12, 0))).toBe('householder-ql');
    expect(method(blockadeChain(12, true), basisState(322, 0))).toBe('lanczos-ql');
  });

  it('turns to Householder where Lanczos does not finish in a quarter of the steps', () => {
    const chain = sparseChain(
      Array.from({ length: 120 }, (_, x) => Math.sin(x * x)),
      1,
    );
    expect(method(chain, basisState(120, 0))).toBe('householder-ql');
  });
});
