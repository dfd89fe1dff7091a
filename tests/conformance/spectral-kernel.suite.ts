/**
 * What every SpectralKernel must do. Tolerances: a stable reduction is exact for a matrix a few n·ε‖H‖ away, so energies agree to
 * `SAFETY`·n·ε‖H‖ and, with levels about ‖H‖/n apart, weights to about n times that; the measured errors are ten to a hundred times smaller.
 */
import { describe, expect, it } from 'vitest';
import type { SpectralKernel, Tridiagonalisation } from '../../src/linalg/kernel.js';
import type { HermitianMatrix, StateVector } from '../../src/linalg/matrix.js';
import { normBound } from '../../src/linalg/norm.js';
import { levelsOf, referenceMeasure } from '../support/exact-spectrum.js';
import {
  basisState,
  blockadeChain,
  dimer,
  randomDense,
  randomSparse,
  randomState,
  ring,
  sparseChain,
  times,
  tridiagonal,
} from '../support/matrices.js';

const SAFETY = 8;
const energyTolerance = (matrix: HermitianMatrix): number => SAFETY * matrix.dimension * Number.EPSILON * normBound(matrix);

interface Solved {
  energies: Float64Array;
  weights: Float64Array;
  overlapRe: Float64Array;
  overlapIm: Float64Array;
}

export function spectralKernelSuite(name: string, kernel: SpectralKernel): void {
  const solve = (t: Tridiagonalisation): Solved => {
    const first = basisState(t.diagonal.length, 0).re;
    const re = t.carried?.re.slice() ?? new Float64Array(first.length);
    const im = t.carried?.im?.slice() ?? new Float64Array(first.length);
    const energies = kernel.eigen(t.diagonal, t.offDiagonal, [first, re, im]);
    return {
      energies,
      weights: first.map((x) => x * x),
      overlapRe: first.map((x, k) => x * re[k]),
      overlapIm: first.map((x, k) => x * im[k]),
    };
  };
  const expectMeasure = (matrix: HermitianMatrix, phi: StateVector, psi: StateVector, t: Tridiagonalisation): void => {
    const found = solve(t);
    const expected = referenceMeasure(matrix, phi, psi, 1e-12 * normBound(matrix));
    const tolerance = energyTolerance(matrix);
    expect(found.energies.length).toBe(expected.length);
    expected.forEach((level, k) => {
      expect(Math.abs(found.energies[k] - level.energy)).toBeLessThan(tolerance);
      expect(Math.abs(found.weights[k] - level.weight)).toBeLessThan(1e-11);
      expect(Math.abs(found.overlapRe[k] - level.overlap[0])).toBeLessThan(1e-11);
      expect(Math.abs(found.overlapIm[k] - level.overlap[1])).toBeLessThan(1e-11);
    });
  };

  describe(`spectral kernel ${name}: householder`, () => {
    for (const n of [1, 2, 3, 4, 5, 6, 7, 8, 9, 40]) {
      it(`agrees with a full diagonalisation by ml-matrix, real, n = ${n}`, () => {
        const matrix = randomDense(n, false, n);
        const [phi, psi] = [randomState(n, false, 1), randomState(n, false, 2)];
        expectMeasure(matrix, phi, psi, kernel.householder(matrix, phi, psi));
      });
      it(`agrees with a full diagonalisation by ml-matrix, complex, n = ${n}`, () => {
        const matrix = randomDense(n, true, n);
        const [phi, psi] = [randomState(n, true, 1), randomState(n, true, 2)];
        expectMeasure(matrix, phi, psi, kernel.householder(matrix, phi, psi));
      });
    }

    it('mixes real and complex matrices and states', () => {
      for (const [a, b, c] of [
        [false, true, false],
        [false, false, true],
        [true, false, false],
        [false, true, true],
      ]) {
        const matrix = randomDense(12, a, 5);
        const [phi, psi] = [randomState(12, b, 3), randomState(12, c, 4)];
        expectMeasure(matrix, phi, psi, kernel.householder(matrix, phi, psi));
      }
    });

    it('takes sparse and tridiagonal storage', () => {
      const flux = ring(7, 1, 0.5);
      const phi = randomState(7, true, 6);
      expectMeasure(flux, phi, phi, kernel.householder(flux, phi, phi));
      const chain = dimer(8, 0.7);
      const middle = randomState(9, false, 6);
      expectMeasure(chain, middle, middle, kernel.householder(chain, middle, middle));
    });

    it('gives positive off-diagonals, e_1 for the start vector, and keeps the length of the carried one', () => {
      for (const complex of [false, true]) {
        const matrix = randomDense(30, complex, 8);
        const phi = randomState(30, complex, 9);
        const t = kernel.householder(matrix, phi, phi);
        expect(t.complete).toBe(true);
        expect(t.offDiagonal.every((x) => x > 0)).toBe(true);
        t.carried!.re.forEach((x, k) => expect(Math.abs(x - (k === 0 ? 1 : 0))).toBeLessThan(1e-14));
        t.carried!.im?.forEach((x) => expect(Math.abs(x)).toBeLessThan(1e-14));
        const psi = randomState(30, complex, 10);
        const { re, im } = kernel.householder(matrix, phi, psi).carried!;
        expect(Math.hypot(...re, ...(im ?? []))).toBeCloseTo(1, 13);
      }
    });

    it('ends where the start vector reaches no further', () => {
      const block = sparseChain([1, 2, 3, 0, 0, 0], 0);
      for (const site of [0, 1, 2, 3]) {
        const { diagonal } = kernel.householder(block, basisState(6, site), null);
        expect(diagonal.length).toBe(1);
        expect(diagonal[0]).toBeCloseTo([1, 2, 3, 0][site], 14);
      }
      const state = { re: Float64Array.of(Math.SQRT1_2, Math.SQRT1_2, 0, 0, 0, 0), im: null };
      expect(kernel.householder(block, state, null).diagonal.length).toBe(2);
    });
  });

  describe(`spectral kernel ${name}: lanczos`, () => {
    it('agrees with a full diagonalisation by ml-matrix, real and complex', () => {
      for (const complex of [false, true]) {
        for (const n of [1, 2, 3, 10, 40]) {
          const matrix = randomDense(n, complex, 20 + n);
          const [phi, psi] = [randomState(n, complex, 1), randomState(n, complex, 2)];
          expectMeasure(matrix, phi, psi, kernel.lanczos(matrix, phi, psi, n));
        }
      }
    });

    it('agrees with a full diagonalisation by ml-matrix on sparse storage, with real and complex states', () => {
      for (const n of [1, 2, 3, 4, 5, 30, 101]) {
        for (const [b, c] of [
          [false, false],
          [false, true],
          [true, true],
        ]) {
          const matrix = randomSparse(n, 40 + n);
          const [phi, psi] = [randomState(n, b, 1), randomState(n, c, 2)];
          expectMeasure(matrix, phi, psi, kernel.lanczos(matrix, phi, psi, n));
        }
      }
    });

    it('keeps levels and weights where plain iteration would find levels again and again', () => {
      // A far level converges long before n steps and draws every later vector towards itself.
      const onsite = Array.from({ length: 300 }, (_, x) => (x === 150 ? 40 : Math.cos(0.7 * x * x)));
      const matrix = sparseChain(onsite, 1.3);
      const phi = randomState(300, false, 7);
      const few = solve(kernel.lanczos(matrix, phi, null, 300));
      const all = solve(kernel.householder(matrix, phi, null));
      expect(few.energies.length).toBe(300);
      all.energies.forEach((energy, k) => {
        expect(Math.abs(few.energies[k] - energy)).toBeLessThan(energyTolerance(matrix));
        expect(Math.abs(few.weights[k] - all.weights[k])).toBeLessThan(1e-11);
      });
    });

    it('says when it was stopped early, and not when it was done', () => {
      const matrix = randomDense(40, false, 3);
      const phi = randomState(40, false, 4);
      const stopped = kernel.lanczos(matrix, phi, null, 10);
      expect(stopped.complete).toBe(false);
      expect(stopped.diagonal.length).toBe(10);
      expect(kernel.lanczos(matrix, phi, null, 40).complete).toBe(true);
    });

    it('ends long before n where the residual at the true step is amplified rounding', () => {
      // 322 states; the vacuum reaches 23 levels, with a residual of 1e-8 after step 23.
      const matrix = blockadeChain(12, true);
      const t = kernel.lanczos(matrix, basisState(322, 0), null, 322);
      expect(t.complete).toBe(true);
      expect(t.diagonal.length).toBeLessThan(161);
      const { weights } = solve(t);
      expect(weights.filter((v) => v > 1e-10).length).toBeGreaterThanOrEqual(23);
      expect(weights.filter((v) => v > 1e-20 && v < 1e-6).length).toBe(0);
    });

    it('ends early in a localised regime, with the levels that are seen', () => {
      const onsite = Array.from({ length: 400 }, (_, x) => 7 * Math.sin(12.9898 * x * x));
      const matrix = sparseChain(onsite, 0.1);
      const t = kernel.lanczos(matrix, basisState(400, 200), null, 400);
      expect(t.complete).toBe(true);
      expect(t.diagonal.length).toBeLessThan(100);
      const all = solve(kernel.householder(matrix, basisState(400, 200), null));
      const few = solve(t);
      all.weights.forEach((v, k) => {
        if (v < 1e-20) return;
        const at = few.energies.findIndex((energy) => Math.abs(energy - all.energies[k]) < 1e-10);
        expect(Math.abs(few.weights[at] / v - 1)).toBeLessThan(1e-3);
      });
    });

    it('carries nothing when nothing is to be carried', () => {
      expect(kernel.lanczos(ring(5), basisState(5, 0), null, 5).carried).toBeNull();
      expect(kernel.householder(ring(5), basisState(5, 0), null).carried).toBeNull();
    });
  });

  describe(`spectral kernel ${name}: eigen`, () => {
    const values = (diagonal: readonly number[], offDiagonal: readonly number[]): Float64Array =>
      kernel.eigen(Float64Array.from(diagonal), Float64Array.from(offDiagonal), []);

    it('gives the levels 2 cos(kπ/(n + 1)) of an open chain, and their weights at its end', () => {
      const n = 60;
      const row = basisState(n, 0).re;
      const energies = kernel.eigen(new Float64Array(n), new Float64Array(n - 1).fill(1), [row]);
      for (let k = 1; k <= n; k += 1) {
        const angle = ((n + 1 - k) * Math.PI) / (n + 1);
        expect(Math.abs(energies[k - 1] - 2 * Math.cos(angle))).toBeLessThan(2e-14);
        expect(Math.abs(row[k - 1] ** 2 - (2 / (n + 1)) * Math.sin(angle) ** 2)).toBeLessThan(1e-14);
      }
    });

    it('keeps the digits of weights down to 1e-60', () => {
      // Spin component J_x from the end of the ladder: levels are whole or half numbers, weights binomial.
      const bosons = 200;
      const row = basisState(bosons + 1, 0).re;
      const energies = kernel.eigen(
        new Float64Array(bosons + 1),
        Float64Array.from({ length: bosons }, (_, k) => 0.5 * Math.sqrt((k + 1) * (bosons - k))),
        [row],
      );
      let choose = 1;
      for (let k = 0; k <= bosons; k += 1) {
        expect(Math.abs(energies[k] - (k - bosons / 2))).toBeLessThan(1e-12);
        expect(Math.abs(row[k] ** 2 / (choose * 2 ** -bosons) - 1)).toBeLessThan(1e-10);
        choose = (choose * (bosons - k)) / (k + 1);
      }
    });

    it('separates what can be separated of the pairs of Wilkinson’s matrix of order 21', () => {
      const distance = Array.from({ length: 21 }, (_, k) => Math.abs(k - 10));
      const energies = values(
        distance,
        Array.from({ length: 20 }, () => 1),
      );
      // The Algebraic Eigenvalue Problem (1965), chapter 5, from memory.
      expect(Math.abs(energies[20] - 10.746194182903393)).toBeLessThan(1e-14);
      expect(Math.abs(energies[19] - 10.746194182903322)).toBeLessThan(1e-14);
      expect(Math.abs(energies[0] + 1.125441522119984)).toBeLessThan(1e-14);
      levelsOf(
        tridiagonal(
          distance,
          Array.from({ length: 20 }, () => 1),
        ),
      ).forEach((energy, k) => expect(Math.abs(energies[k] - energy)).toBeLessThan(1e-13));
    });

    it('keeps relative accuracy on matrices graded either way', () => {
      // diag(10^-k) with weak couplings: the product of all levels is the determinant, here by its recurrence.
      const diagonal = Array.from({ length: 12 }, (_, k) => 10 ** -k);
      const off = Array.from({ length: 11 }, (_, k) => 0.1 * 10 ** -(k + 0.5));
      let [before, determinant] = [1, diagonal[0]];
      for (let k = 1; k < 12; k += 1) [before, determinant] = [determinant, diagonal[k] * determinant - off[k - 1] ** 2 * before];
      for (const energies of [values(diagonal, off), values([...diagonal].reverse(), [...off].reverse())]) {
        const product = energies.reduce((total, x) => total * x, 1);
        expect(Math.abs(product / determinant - 1)).toBeLessThan(1e-12);
      }
    });

    it('finds pairs ±E where the diagonal is zero', () => {
      const energies = values(
        new Array<number>(31).fill(0),
        Array.from({ length: 30 }, (_, k) => 1 + 0.3 * Math.sin(k)),
      );
      for (let k = 0; k < 31; k += 1) expect(Math.abs(energies[k] + energies[30 - k])).toBeLessThan(1e-14);
      expect(Math.abs(energies[15])).toBeLessThan(1e-15);
    });

    it('does not care about the signs of off-diagonals but in the rows', () => {
      const d = Float64Array.of(1, -2, 0.5, 3);
      const plus = Float64Array.of(0.7, 1.1, 0.2);
      const minus = Float64Array.of(-0.7, 1.1, -0.2);
      const rowPlus = [basisState(4, 0).re, Float64Array.of(0, 0, 0, 1)];
      const rowMinus = [basisState(4, 0).re, Float64Array.of(0, 0, 0, 1)];
      expect(kernel.eigen(d, minus, rowMinus)).toEqual(kernel.eigen(d, plus, rowPlus));
      // Two sign changes before the last index: the same product of amplitudes.
      rowPlus[0].forEach((x, k) => expect(rowMinus[0][k] * rowMinus[1][k]).toBeCloseTo(x * rowPlus[1][k], 15));
    });

    it('works at scales of 1e±150, on zero, and on one level', () => {
      const diagonal = [0.3, -1, 2, 0.1];
      const off = [0.5, 0.25, 1];
      const unit = values(diagonal, off);
      for (const factor of [1e150, 1e-150]) {
        values(
          diagonal.map((x) => x * factor),
          off.map((x) => x * factor),
        ).forEach((x, k) => expect(Math.abs(x / factor - unit[k])).toBeLessThan(1e-14));
      }
      expect(values([0, 0, 0], [0, 0])).toEqual(Float64Array.of(0, 0, 0));
      expect(values([-3], [])).toEqual(Float64Array.of(-3));
    });

    it('keeps the blocks of a reduced matrix apart', () => {
      const row = basisState(4, 0).re;
      const energies = kernel.eigen(Float64Array.of(0, 0, 0, 0), Float64Array.of(1, 0, 2), [row]);
      [-2, -1, 1, 2].forEach((energy, k) => expect(energies[k]).toBeCloseTo(energy, 15));
      expect(row[0]).toBe(0);
      expect(row[3]).toBe(0);
    });

    it('refuses what cannot converge', () => {
      expect(() => values([1, NaN, 2], [1, 1])).toThrow(expect.objectContaining({ code: 'kernel.no-convergence' }));
    });
  });

  describe(`spectral kernel ${name}: contract`, () => {
    it('leaves its arguments as they are and repeats itself bit by bit', () => {
      for (const complex of [false, true]) {
        const matrix = randomDense(20, complex, 50);
        const [phi, psi] = [randomState(20, complex, 51), randomState(20, complex, 52)];
        const before = structuredClone([matrix, phi, psi]);
        for (const run of [() => kernel.householder(matrix, phi, psi), () => kernel.lanczos(matrix, phi, psi, 20)]) {
          const t = run();
          expect(run()).toEqual(t);
          expect([matrix, phi, psi]).toEqual(before);
          const kept = structuredClone([t.diagonal, t.offDiagonal]);
          kernel.eigen(t.diagonal, t.offDiagonal, []);
          expect([t.diagonal, t.offDiagonal]).toEqual(kept);
        }
      }
    });

    it('reduces matrices of any scale to the same digits', () => {
      const matrix = randomDense(16, true, 60);
      const phi = randomState(16, true, 61);
      // Powers of two, so that the matrix itself is not rounded.
      for (const factor of [2 ** 500, 2 ** -500]) {
        for (const reduce of [
          (m: HermitianMatrix) => kernel.householder(m, phi, null),
          (m: HermitianMatrix) => kernel.lanczos(m, phi, null, 16),
        ]) {
          const unit = reduce(matrix);
          const scaled = reduce(times(matrix, factor));
          expect(scaled.diagonal.map((x) => x / factor)).toEqual(unit.diagonal);
          expect(scaled.offDiagonal.map((x) => x / factor)).toEqual(unit.offDiagonal);
        }
      }
    });
  });
}
