import { describe, expect, it } from 'vitest';
import { referenceKernel } from '../../../src/linalg/reference/reference-kernel.js';
import { reduce, structuralDimension } from '../../../src/spectral/reduce.js';
import { spectralMeasure } from '../../../src/spectral/measure.js';
import { SparseBuilder } from '../../../src/linalg/sparse-builder.js';
import type { SpectralKernel } from '../../../src/linalg/kernel.js';
import { basisState, blockadeChain, dimer, randomDense, ring, sparseChain, systemFrom, tridiagonal } from '../../support/matrices.js';

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

  it('sees the same levels by both routes, however weakly two mirror halves are coupled', () => {
    // Twenty sites, their mirror image behind a weak bond, and 360 sites out of reach. While doublets split, forty levels; then twenty.
    const alwaysHouseholder: SpectralKernel = {
      ...referenceKernel,
      lanczos: (...given) => ({ ...referenceKernel.lanczos(...given), complete: false }),
    };
    for (const [bond, levels] of [
      [1e-4, 40],
      [1e-6, 40],
      [1e-12, 20],
      [1e-14, 20],
      [0, 20],
    ]) {
      const builder = new SparseBuilder(400);
      for (let x = 0; x < 400; x += 1) {
        const mirrored = x < 20 || x >= 40 ? x : 39 - x;
        builder.add(x, x, Math.sin(mirrored * mirrored + 0.3));
        if (x < 399 && x !== 19 && x !== 39) builder.couple(x, x + 1, 1);
      }
      if (bond > 0) builder.couple(19, 20, bond);
      const system = systemFrom(builder.build(), basisState(400, 0));
      const [a, b] = [spectralMeasure(system), spectralMeasure(system, alwaysHouseholder)];
      expect([a.fields.method, b.fields.method]).toEqual(['lanczos-ql', 'householder-ql']);
      expect([a.fields.bright_levels, b.fields.bright_levels]).toEqual([levels, levels]);
      a.measure.energies.forEach((energy, k) => expect(Math.abs(energy - b.measure.energies[k])).toBeLessThan(1e-12));
    }
  });

  it('turns to Householder where Lanczos does not finish in a quarter of the steps', () => {
    const chain = sparseChain(
      Array.from({ length: 120 }, (_, x) => Math.sin(x * x)),
      1,
    );
    expect(method(chain, basisState(120, 0))).toBe('householder-ql');
  });
});
