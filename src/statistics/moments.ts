/**
 * Total detection probability and the exact moments of the first-detection number, without following the series.
 *
 * M = K(X∘M)K + S has the sums over all steps as its solution: with S = a a† it is M_1 = Σ_k R_k and Σ n F_n = tr M_1; with S = M_1 it is
 * M_2 and Σ n² F_n = 2 tr M_2 − tr M_1. For Hermitian S it comes down to n real unknowns (derived in DEVELOPERS.md): in units of t_i t_j,
 * with B = 1/(1 − X), C = X B, G_ij = S_ij − (S_ii + S_jj)/2 and s = tr S/η,
 *
 *     z_i (1 + κ Σ_j Re C_ij v_j) − κ Σ_j Re C_ij v_j z_j = Im Σ_j C_ij G_ij v_j
 *     M_ij = B_ij (G_ij − iκ(z_i − z_j))                                                    off the diagonal
 *     v_i M_ii = (κ² s + S_ii)/(2κ) − Re Σ_j C_ij G_ij v_j + κ Σ_j Im C_ij v_j (z_j − z_i)
 *
 * Re C ≥ −1/2, so the matrix in units of t is symmetric and ≥ 1/2: a Cholesky factorisation always exists and small gaps do not spoil it.
 * G is formed from differences, so that levels whose elements agree add nothing however close they are. With a fixed interval
 * Re C = −1/2 throughout and the inverse is known. O(n³) once (fixed: O(n²)), O(n²) for each further right-hand side.
 *
 * Measures are those of levels.ts: v > 0, Σ v = 1, merged where χ = 1.
 */
import { positiveDefiniteSolver, type LinearSolve } from '../linalg/positive-definite.js';
import type { IntervalDistribution } from '../schedules/types.js';
import type { SpectralMeasure } from '../spectral/types.js';
import { isReturn } from './levels.js';
import { pairComplements, pairRows, type Rows } from './pairs.js';
import { amplitudeReduction } from './stroboscopic.js';

/** P = Σ |q_j|²/v_j over levels merged where χ = 1. (Dark states of quantum search cause imperfect detection, Phys. Rev. Research 2, 043107 (2020), 10.1103/PhysRevResearch.2.043107.) */
export function detectionProbability(measure: SpectralMeasure): number {
  if (isReturn(measure)) return 1;
  const { weights, overlapRe, overlapIm } = measure;
  const sum = weights.reduce(
    (total, weight, i) => total + (overlapRe[i] / weight) * overlapRe[i] + ((overlapIm?.[i] ?? 0) / weight) * (overlapIm?.[i] ?? 0),
    0,
  );
  return Math.min(1, sum);
}

/** Hermitian matrix in units of t_i t_j: the upper half row by row, and the diagonal. */
export interface ScaledHermitian extends Rows {
  readonly diagonal: Float64Array;
}

/** A right-hand side: the rows of G, and the diagonal of S. */
export type Source = ScaledHermitian;

export interface DetectionMoments {
  /** mean of n given detection */
  readonly mean: number;
  /** variance of n given detection */
  readonly variance: number;
}

/**
 * Mean and variance of the number of measurements at the first click, given that it comes.
 * For return the mean is (number of levels)/η (Recurrence for discrete time unitary evolutions, Commun. Math. Phys. 320, 543 (2013),
 * 10.1007/s00220-012-1645-2, for η = 1 and a fixed interval).
 * @param pairs 1 − χ between the levels, where it is at hand
 * @returns null where P = 0
 */
export function detectionMoments(
  measure: SpectralMeasure,
  distribution: IntervalDistribution,
  efficiency = 1,
  pairs: Rows = distribution.random ? pairComplements(measure, distribution) : pairRows(measure, distribution),
): DetectionMoments | null {
  const n = measure.energies.length;
  const probability = detectionProbability(measure);
  if (!(probability > 0)) return null;
  const solver = momentSolver(measure, distribution, efficiency, pairs);
  if (isReturn(measure)) {
    // M_1 = 1/η exactly, as K² = 1 − ηφφ†.
    const mean = n / efficiency;
    const second = trace(solver.solve(diagonalSource(measure.weights.map((weight) => 1 / (efficiency * weight)))), measure.weights);
    return { mean, variance: Math.max(0, 2 * second - mean - mean * mean) };
  }
  const first = solver.solve(preparedSource(measure));
  const mean = trace(first, measure.weights) / probability;
  const second = trace(solver.solve(asSource(first)), measure.weights) / probability;
  return { mean, variance: Math.max(0, 2 * second - mean - mean * mean) };
}

export function trace(matrix: ScaledHermitian, weights: Float64Array): number {
  return matrix.diagonal.reduce((sum, value, i) => sum + weights[i] * value, 0);
}

/** S = a a†. */
export function preparedSource(measure: SpectralMeasure): Source {
  const { weights, overlapRe, overlapIm } = measure;
  const n = weights.length;
  const aRe = overlapRe.map((value, i) => value / weights[i]);
  const aIm = overlapIm?.map((value, i) => value / weights[i]) ?? new Float64Array(n);
  return {
    diagonal: aRe.map((value, i) => value * value + aIm[i] * aIm[i]),
    fill(i, re, im) {
      for (let j = i + 1; j < n; j++) {
        const dRe = aRe[i] - aRe[j];
        const dIm = aIm[i] - aIm[j];
        re[j] = -(dRe * dRe + dIm * dIm) / 2;
        im[j] = dIm * aRe[j] - dRe * aIm[j];
      }
    },
  };
}

/** S without off-diagonal elements. */
export function diagonalSource(diagonal: Float64Array): Source {
  return {
    diagonal,
    fill(i, re, im) {
      for (let j = i + 1; j < diagonal.length; j++) {
        re[j] = -(diagonal[i] + diagonal[j]) / 2;
        im[j] = 0;
      }
    },
  };
}

/** S = a solution. */
export function asSource(matrix: ScaledHermitian): Source {
  const { diagonal } = matrix;
  return {
    diagonal,
    fill(i, re, im) {
      matrix.fill(i, re, im);
      for (let j = i + 1; j < diagonal.length; j++) re[j] -= (diagonal[i] + diagonal[j]) / 2;
    },
  };
}

export interface MomentSolver {
  solve(source: Source): ScaledHermitian;
}

export function momentSolver(measure: SpectralMeasure, distribution: IntervalDistribution, efficiency: number, pairs: Rows): MomentSolver {
  const { weights: v } = measure;
  const n = v.length;
  const kappa = amplitudeReduction(efficiency);
  const inverse = inverseRows(pairs, n);
  const connection = distribution.random ? connectedMatrix(v, inverse, kappa) : uniformMatrix(v, kappa);
  const bRe = new Float64Array(n);
  const bIm = new Float64Array(n);
  const gRe = new Float64Array(n);
  const gIm = new Float64Array(n);
  return {
    solve(source) {
      // h_i = Σ_j C_ij G_ij v_j
      const hRe = new Float64Array(n);
      const hIm = new Float64Array(n);
      for (let i = 0; i < n; i++) {
        inverse.fill(i, bRe, bIm);
        source.fill(i, gRe, gIm);
        for (let j = i + 1; j < n; j++) {
          const re = (bRe[j] - 1) * gRe[j] - bIm[j] * gIm[j];
          const im = (bRe[j] - 1) * gIm[j] + bIm[j] * gRe[j];
          hRe[i] += re * v[j];
          hIm[i] += im * v[j];
          hRe[j] += re * v[i];
          hIm[j] -= im * v[i];
        }
      }
      const z = connection(hIm);
      const s = source.diagonal.reduce((sum, value, i) => sum + v[i] * value, 0) / efficiency;
      const held = source.diagonal.map((value, i) => (kappa * kappa * s + value) / (2 * kappa) - hRe[i]);
      for (let i = 0; i < n; i++) {
        inverse.fill(i, bRe, bIm);
        for (let j = i + 1; j < n; j++) {
          const turned = kappa * (z[i] - z[j]);
          held[i] -= bIm[j] * v[j] * turned;
          held[j] -= bIm[j] * v[i] * turned;
        }
      }
      const rowRe = new Float64Array(n);
      const rowIm = new Float64Array(n);
      return {
        diagonal: held.map((value, i) => value / v[i]),
        fill(i, re, im) {
          inverse.fill(i, rowRe, rowIm);
          source.fill(i, re, im);
          for (let j = i + 1; j < n; j++) {
            const g = re[j];
            const turned = im[j] - kappa * (z[i] - z[j]);
            re[j] = rowRe[j] * g - rowIm[j] * turned;
            im[j] = rowRe[j] * turned + rowIm[j] * g;
          }
        },
      };
    },
  };
}

/** B = 1/(1 − X). */
function inverseRows(pairs: Rows, n: number): Rows {
  return {
    fill(i, re, im) {
      pairs.fill(i, re, im);
      for (let j = i + 1; j < n; j++) {
        // By the ratio of the parts rather than the square of the modulus, which could underflow (common practice).
        const a = re[j];
        const b = im[j];
        if (Math.abs(a) >= Math.abs(b)) {
          const ratio = b / a;
          re[j] = 1 / (a + b * ratio);
          im[j] = -ratio * re[j];
        } else {
          const ratio = a / b;
          im[j] = -1 / (b + a * ratio);
          re[j] = -ratio * im[j];
        }
      }
    },
  };
}

/** Re C = −1/2: z_i(1 − κ/2) + (κ/2) Σ_j v_j z_j = r_i, and Σ_i v_i z_i = Σ_i v_i r_i. */
function uniformMatrix(v: Float64Array, kappa: number): LinearSolve {
  return (right) => {
    const mean = right.reduce((sum, value, i) => sum + v[i] * value, 0);
    return right.map((value) => (value - (kappa / 2) * mean) / (1 - kappa / 2));
  };
}

function connectedMatrix(v: Float64Array, inverse: Rows, kappa: number): LinearSolve {
  const n = v.length;
  const t = v.map(Math.sqrt);
  const diagonal = new Float64Array(n).fill(1);
  const bRe = new Float64Array(n);
  const bIm = new Float64Array(n);
  const solve = positiveDefiniteSolver(n, (set) => {
    for (let i = 0; i < n; i++) {
      inverse.fill(i, bRe, bIm);
      for (let j = i + 1; j < n; j++) {
        const c = kappa * (bRe[j] - 1);
        diagonal[i] += c * v[j];
        diagonal[j] += c * v[i];
        set(i, j, -c * t[i] * t[j]);
      }
    }
    diagonal.forEach((value, i) => set(i, i, value));
  });
  return (right) => {
    const z = solve(right.map((value, i) => value * t[i])).map((value, i) => value / t[i]);
    // One Jacobi sweep: the division by a tiny t_i has magnified the error of its component; the equation itself gives it back.
    const rest = right.slice();
    for (let i = 0; i < n; i++) {
      inverse.fill(i, bRe, bIm);
      for (let j = i + 1; j < n; j++) {
        const c = kappa * (bRe[j] - 1);
        rest[i] += c * v[j] * z[j];
        rest[j] += c * v[i] * z[i];
      }
    }
    return rest.map((value, i) => value / diagonal[i]);
  };
}
