import { describe, expect, it } from 'vitest';
import { referenceKernel } from '../../../src/linalg/reference/reference-kernel.js';
import type { SpectralKernel } from '../../../src/linalg/kernel.js';
import { spectralMeasure } from '../../../src/spectral/measure.js';
import { basisState, dimer, randomDense, randomState, ring, sparseChain, systemFrom, times, tridiagonal } from '../../support/matrices.js';

describe('spectralMeasure', () => {
  it('measures a single state', () => {
    const { measure, fields, overlap } = spectralMeasure(systemFrom(tridiagonal([2.5], []), basisState(1, 0)));
    expect(measure.energies).toEqual(Float64Array.of(2.5));
    expect(measure.weights).toEqual(Float64Array.of(1));
    expect(overlap).toEqual([1, 0]);
    expect(fields).toMatchObject({ accessible_dimension: 1, bright_levels: 1, smallest_gap: null, gap_ratio: null, energy_variance: 0 });
    const dense = spectralMeasure(systemFrom(randomDense(1, true, 1), randomState(1, true, 1)));
    expect(dense.measure.weights[0]).toBeCloseTo(1, 15);
  });

  it('measures a zero Hamiltonian as one level', () => {
    for (const matrix of [tridiagonal([0, 0, 0], [0, 0]), times(randomDense(3, false, 1), 0)]) {
      const { measure, fields } = spectralMeasure(systemFrom(matrix, randomState(3, false, 2)));
      expect([...measure.energies]).toEqual([0]);
      expect(fields.accessible_dimension).toBe(1);
      expect(fields.flags).toEqual([]);
    }
  });

  it('shares one array for the return problem and separates the overlaps of a transition', () => {
    const home = spectralMeasure(systemFrom(ring(6), basisState(6, 0)));
    expect(home.measure.overlapRe).toBe(home.measure.weights);
    const away = spectralMeasure(systemFrom(ring(6), basisState(6, 0), basisState(6, 2)));
    expect(away.overlap).toEqual([0, 0]);
    // q_j = w_j cos(2πkr/L) at displacement r = 2, levels −2, −1, 1, 2 (closed form).
    [1 / 6, -1 / 6, -1 / 6, 1 / 6].forEach((q, k) => expect(away.measure.overlapRe[k]).toBeCloseTo(q, 14));
  });

  it('knows the accessible dimension of an end state by structure, and says what double precision does not see', () => {
    const { fields } = spectralMeasure(systemFrom(dimer(60, 1), basisState(61, 0)));
    expect(fields).toMatchObject({ accessible_dimension: 61, accessible_by: 'structure', flags: ['underresolved'] });
    expect(fields.bright_levels).toBeLessThan(61);
    expect(fields.flag_reasons.length).toBe(1);
    const middle = spectralMeasure(systemFrom(dimer(8, 0.3), basisState(9, 4))).fields;
    // Even parity only: five of nine levels.
    expect(middle).toMatchObject({ accessible_dimension: 5, accessible_by: 'weights', flags: [] });
  });

  it('flags levels at the limit of double precision', () => {
    // A pair 2δ apart, coupled to a far level so that the norm is 1e3.
    const near = spectralMeasure(systemFrom(tridiagonal([0, 0, 1000], [5e-11, 0]), basisState(3, 0)));
    expect(near.fields.flags).toEqual(['doubtful']);
    const far = spectralMeasure(systemFrom(tridiagonal([0, 0, 1000], [5e-9, 0]), basisState(3, 0)));
    expect(far.fields.flags).toEqual([]);
  });

  it('flags a measure whose moments or overlaps do not fit H', () => {
    const wrongLevels: SpectralKernel = {
      ...referenceKernel,
      eigen: (d, e, rows) =>
        referenceKernel.eigen(
          d.map((x) => x + 1e-6),
          e,
          rows,
        ),
    };
    const system = systemFrom(randomDense(6, false, 1), randomState(6, false, 1), randomState(6, false, 2));
    expect(spectralMeasure(system, wrongLevels).fields.flags).toEqual(['doubtful']);
    const wrongOverlaps: SpectralKernel = {
      ...referenceKernel,
      householder: (...given) => {
        const t = referenceKernel.householder(...given);
        return { ...t, carried: { re: t.carried!.re.map((x) => x + 1e-6), im: null } };
      },
    };
    const { fields } = spectralMeasure(system, wrongOverlaps);
    expect(fields.flags).toEqual(['doubtful']);
    expect(fields.flag_reasons[0]).toContain('overlaps');
    expect(spectralMeasure(system).fields.flags).toEqual([]);
  });

  it('handles a prepared state that is partly outside the sector', () => {
    const psi = { re: Float64Array.of(0.3, 0.4, 0), im: null };
    const { measure, overlap } = spectralMeasure(systemFrom(randomDense(3, false, 4), basisState(3, 0), psi));
    expect(overlap[0]).toBe(0.3);
    expect(measure.overlapRe.reduce((total, q) => total + q, 0)).toBeCloseTo(0.3, 14);
  });

  it('works at scales of 1e±150', () => {
    for (const matrix of [dimer(6, 0.7), ring(7, 1, 0.4), randomDense(8, true, 3)]) {
      const unit = spectralMeasure(systemFrom(matrix, basisState(matrix.dimension, 0)));
      for (const factor of [1e150, 1e-150]) {
        const { measure, fields } = spectralMeasure(systemFrom(times(matrix, factor), basisState(matrix.dimension, 0)));
        measure.energies.forEach((energy, k) => expect(energy / factor).toBeCloseTo(unit.measure.energies[k], 12));
        measure.weights.forEach((v, k) => expect(v).toBeCloseTo(unit.measure.weights[k], 12));
        expect(fields.measure_residual).toBeLessThan(1e-13);
        expect(fields.flags).toEqual([]);
      }
    }
  });

  it('names its route', () => {
    expect(spectralMeasure(systemFrom(dimer(5, 1), basisState(6, 5))).fields.method).toBe('tridiagonal-ql');
    expect(spectralMeasure(systemFrom(ring(200), basisState(200, 0))).fields.method).toBe('householder-ql');
    expect(spectralMeasure(systemFrom(sparseChain(new Float64Array(200), 0), basisState(200, 7))).fields.method).toBe('lanczos-ql');
  });

  it('refuses states and matrices that it cannot measure', () => {
    const refuse = (run: () => unknown, code: string): void => expect(run).toThrow(expect.objectContaining({ code }));
    const [matrix, phi] = [randomDense(3, false, 1), randomState(3, false, 1)];
    refuse(() => spectralMeasure(systemFrom(matrix, randomState(4, false, 1))), 'matrix.dimension');
    refuse(() => spectralMeasure(systemFrom(matrix, { re: Float64Array.of(1, NaN, 0), im: null })), 'matrix.not-finite');
    refuse(() => spectralMeasure(systemFrom(matrix, { re: Float64Array.of(1, 1, 0), im: null })), 'state.invalid');
    refuse(() => spectralMeasure(systemFrom(matrix, phi, { re: Float64Array.of(1, 1, 0), im: null })), 'state.invalid');
    refuse(() => spectralMeasure(systemFrom(times(matrix, Infinity), phi)), 'matrix.not-finite');
    refuse(() => spectralMeasure(systemFrom(tridiagonal([1, 2], [NaN]), basisState(2, 0))), 'matrix.not-finite');
  });
});
