import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { applyMatrix, isComplexPair } from '../../src/linalg/apply.js';
import type { DenseMatrix, HermitianMatrix, StateVector } from '../../src/linalg/matrix.js';
import { normBound } from '../../src/linalg/norm.js';
import { SparseBuilder } from '../../src/linalg/sparse-builder.js';
import { innerProduct, zeroVector } from '../../src/linalg/vector.js';
import { spectralMeasure } from '../../src/spectral/measure.js';
import { randomDense, randomState, systemFrom, times, tridiagonal } from '../support/matrices.js';

const dimension = fc.integer({ min: 1, max: 14 });
const seed = fc.integer({ min: 0, max: 1_000_000 });
/** Rounding of a reduction at these dimensions is some 1e-15‖H‖; three digits of room. */
const TOLERANCE = 1e-12;

/** Dense, sparse with holes, or tridiagonal, each real or complex where it can be. */
const matrix: fc.Arbitrary<HermitianMatrix> = fc
  .record({ n: dimension, complex: fc.boolean(), seed, kind: fc.constantFrom('dense', 'sparse', 'tridiagonal') })
  .map(({ n, complex, seed: from, kind }) => {
    const dense = randomDense(n, complex, from);
    if (kind === 'dense') return dense;
    if (kind === 'tridiagonal') {
      const at = (i: number, j: number): number => dense.re[i * n + j];
      return tridiagonal(
        Array.from({ length: n }, (_, i) => at(i, i)),
        Array.from({ length: n - 1 }, (_, i) => at(i, i + 1)),
      );
    }
    const builder = new SparseBuilder(n);
    for (let i = 0; i < n; i += 1) {
      builder.add(i, i, dense.re[i * n + i]);
      for (let j = 0; j < i; j += 1) if ((i + j + from) % 3 !== 0) builder.couple(i, j, dense.re[i * n + j], dense.im?.[i * n + j] ?? 0);
    }
    return builder.build();
  });

const problem = fc.record({ matrix, phiSeed: seed, psiSeed: seed, complexPhi: fc.boolean(), complexPsi: fc.boolean() }).map((given) => ({
  matrix: given.matrix,
  phi: randomState(given.matrix.dimension, given.complexPhi, given.phiSeed),
  psi: randomState(given.matrix.dimension, given.complexPsi, given.psiSeed),
}));

const close = (found: number, expected: number, scale = 1): void =>
  expect(Math.abs(found - expected)).toBeLessThanOrEqual(TOLERANCE * scale);

/** H + shift·1 */
function shifted(given: HermitianMatrix, shift: number): HermitianMatrix {
  if (given.kind === 'tridiagonal') return { ...given, diagonal: given.diagonal.map((x) => x + shift) };
  const builder = new SparseBuilder(given.dimension);
  const dense: DenseMatrix | null = given.kind === 'dense' ? given : null;
  for (let i = 0; i < given.dimension; i += 1) {
    builder.add(i, i, shift);
    const [from, to] =
      given.kind === 'sparse' ? [given.rowStart[i], given.rowStart[i + 1]] : [i * given.dimension, (i + 1) * given.dimension];
    for (let k = from; k < to; k += 1)
      builder.add(i, dense === null ? (given as { column: Int32Array }).column[k] : k - from, given.re[k], given.im?.[k] ?? 0);
  }
  return builder.build();
}

describe('spectral measure of any pair of states', () => {
  it('sums to one, bounds |q|² by w v, and adds up to <φ|ψ>', () => {
    fc.assert(
      fc.property(problem, ({ matrix: h, phi, psi }) => {
        const { measure, overlap } = spectralMeasure(systemFrom(h, phi, psi));
        const back = spectralMeasure(systemFrom(h, psi, phi)).measure;
        close(
          measure.weights.reduce((total, v) => total + v, 0),
          1,
        );
        const sum = (plane: Float64Array | null): number => plane?.reduce((total, q) => total + q, 0) ?? 0;
        close(sum(measure.overlapRe), overlap[0]);
        close(sum(measure.overlapIm), overlap[1]);
        measure.energies.forEach((energy, k) => {
          const q2 = measure.overlapRe[k] ** 2 + (measure.overlapIm?.[k] ?? 0) ** 2;
          const j = back.energies.findIndex((other) => Math.abs(other - energy) < 1e-9 * normBound(h));
          const w = j < 0 ? 0 : back.weights[j];
          expect(q2).toBeLessThanOrEqual(w * measure.weights[k] + TOLERANCE);
          // The other direction is the complex conjugate.
          if (j < 0) return;
          close(back.overlapRe[j], measure.overlapRe[k], 10);
          close(back.overlapIm?.[j] ?? 0, -(measure.overlapIm?.[k] ?? 0), 10);
        });
      }),
    );
  });

  it('has the moments <φ|H^k|ψ> of H itself, k = 0 … 4', () => {
    fc.assert(
      fc.property(problem, ({ matrix: h, phi, psi }) => {
        const { measure } = spectralMeasure(systemFrom(h, phi, psi));
        const norm = normBound(h);
        let image: StateVector = psi;
        for (let power = 0; power <= 4; power += 1) {
          const [re, im] = innerProduct(phi, image);
          const moment = (plane: Float64Array | null): number =>
            measure.energies.reduce((total, energy, k) => total + (plane?.[k] ?? 0) * energy ** power, 0);
          close(moment(measure.overlapRe), re, norm ** power);
          close(moment(measure.overlapIm), im, norm ** power);
          const next = zeroVector(h.dimension, isComplexPair(h, image));
          applyMatrix(h, image, next);
          image = next;
        }
      }),
    );
  });

  it('moves with a shift and a factor of H, weights unchanged', () => {
    fc.assert(
      fc.property(
        problem,
        fc.double({ min: -20, max: 20, noNaN: true }),
        fc.constantFrom(3, 0.01, -1),
        ({ matrix: h, phi }, shift, factor) => {
          const plain = spectralMeasure(systemFrom(h, phi));
          const moved = spectralMeasure(systemFrom(shifted(h, shift), phi));
          const stretched = spectralMeasure(systemFrom(times(h, factor), phi));
          // Faint levels may cross the threshold of visibility; they must be faint.
          const compare = (other: typeof plain, map: (energy: number) => number, scale: number): void => {
            plain.measure.energies.forEach((energy, k) => {
              if (plain.measure.weights[k] < 1e-12) return;
              const j = other.measure.energies.findIndex((x) => Math.abs(x - map(energy)) <= TOLERANCE * scale);
              expect(j).toBeGreaterThanOrEqual(0);
              close(other.measure.weights[j], plain.measure.weights[k], 1000);
            });
          };
          compare(moved, (energy) => energy + shift, 1 + normBound(h) + Math.abs(shift));
          compare(stretched, (energy) => energy * factor, Math.abs(factor) * normBound(h));
        },
      ),
    );
  });

  it('does not change with the storage of the same matrix', () => {
    fc.assert(
      fc.property(problem, ({ matrix: h, phi, psi }) => {
        const a = spectralMeasure(systemFrom(h, phi, psi)).fields;
        const b = spectralMeasure(systemFrom(shifted(h, 0), phi, psi)).fields;
        close(b.mean_energy, a.mean_energy, normBound(h));
        close(b.effective_dimension, a.effective_dimension, 1000);
        expect(b.bright_levels).toBe(a.bright_levels);
      }),
    );
  });

  it('does not change with a phase of φ, and q turns with it', () => {
    fc.assert(
      fc.property(problem, fc.double({ min: 0, max: 6.28, noNaN: true }), ({ matrix: h, phi, psi }, angle) => {
        const [c, s] = [Math.cos(angle), Math.sin(angle)];
        const turned = {
          re: phi.re.map((x, k) => c * x - s * (phi.im?.[k] ?? 0)),
          im: phi.re.map((x, k) => s * x + c * (phi.im?.[k] ?? 0)),
        };
        const a = spectralMeasure(systemFrom(h, phi, psi)).measure;
        const b = spectralMeasure(systemFrom(h, turned, psi)).measure;
        expect(b.energies.length).toBe(a.energies.length);
        a.weights.forEach((v, k) => {
          const [re, im] = [a.overlapRe[k], a.overlapIm?.[k] ?? 0];
          close(b.weights[k], v, 1000);
          close(b.overlapRe[k], c * re + s * im, 1000);
          close(b.overlapIm?.[k] ?? 0, c * im - s * re, 1000);
        });
      }),
    );
  });
});
