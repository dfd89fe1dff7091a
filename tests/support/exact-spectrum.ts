/**
 * Reference diagonalisation by ml-matrix, for small systems: the general-purpose library knows nothing of this project's kernels.
 * A complex Hermitian H = A + iB is handed over as the real symmetric [[A, −B], [B, A]], which has every level twice.
 */
import { EigenvalueDecomposition, Matrix } from 'ml-matrix';
import type { HermitianMatrix, StateVector } from '../../src/linalg/matrix.js';

export interface DensePlanes {
  readonly re: Matrix;
  readonly im: Matrix;
}

export function densePlanes(matrix: HermitianMatrix): DensePlanes {
  const n = matrix.dimension;
  const re = Matrix.zeros(n, n);
  const im = Matrix.zeros(n, n);
  if (matrix.kind === 'tridiagonal') {
    matrix.diagonal.forEach((value, i) => re.set(i, i, value));
    matrix.offDiagonal.forEach((value, i) => {
      re.set(i, i + 1, value);
      re.set(i + 1, i, value);
    });
  } else if (matrix.kind === 'dense') {
    for (let i = 0; i < n * n; i += 1) {
      re.set(Math.floor(i / n), i % n, matrix.re[i]);
      im.set(Math.floor(i / n), i % n, matrix.im?.[i] ?? 0);
    }
  } else {
    for (let row = 0; row < n; row += 1) {
      for (let at = matrix.rowStart[row]; at < matrix.rowStart[row + 1]; at += 1) {
        re.set(row, matrix.column[at], matrix.re[at]);
        im.set(row, matrix.column[at], matrix.im?.[at] ?? 0);
      }
    }
  }
  return { re, im };
}

const isReal = (plane: Matrix): boolean => plane.to1DArray().every((value) => value === 0);

function embedded({ re, im }: DensePlanes): Matrix {
  const n = re.rows;
  const whole = Matrix.zeros(2 * n, 2 * n);
  whole.setSubMatrix(re, 0, 0).setSubMatrix(re, n, n).setSubMatrix(im, n, 0).setSubMatrix(Matrix.mul(im, -1), 0, n);
  return whole;
}

/** All eigenvalues, ascending, with multiplicity. */
export function levelsOf(matrix: HermitianMatrix): number[] {
  const planes = densePlanes(matrix);
  const real = isReal(planes.im);
  const values = new EigenvalueDecomposition(real ? planes.re : embedded(planes), { assumeSymmetric: true }).realEigenvalues;
  values.sort((a, b) => a - b);
  return real ? values : values.filter((_, i) => i % 2 === 0);
}

export interface ReferenceLevel {
  readonly energy: number;
  /** <φ|P|φ> */
  readonly weight: number;
  /** <φ|P|ψ> */
  readonly overlap: readonly [number, number];
}

/** Distinct levels (closer than `tolerance` is one level) with their weights, by eigenvectors. */
export function referenceMeasure(
  matrix: HermitianMatrix,
  detected: StateVector,
  prepared: StateVector,
  tolerance = 1e-9,
): ReferenceLevel[] {
  const n = matrix.dimension;
  const { realEigenvalues, eigenvectorMatrix } = new EigenvalueDecomposition(embedded(densePlanes(matrix)), { assumeSymmetric: true });
  const dot = (column: number, a: StateVector, turned: boolean): number => {
    let sum = 0;
    for (let i = 0; i < n; i += 1) {
      const [x, y] = turned ? [-(a.im?.[i] ?? 0), a.re[i]] : [a.re[i], a.im?.[i] ?? 0];
      sum += eigenvectorMatrix.get(i, column) * x + eigenvectorMatrix.get(n + i, column) * y;
    }
    return sum;
  };
  const order = realEigenvalues.map((_, i) => i).sort((a, b) => realEigenvalues[a] - realEigenvalues[b]);
  const levels: { energy: number; weight: number; overlap: [number, number] }[] = [];
  for (const column of order) {
    const energy = realEigenvalues[column];
    let level = levels.at(-1);
    if (level === undefined || energy - level.energy > tolerance) levels.push((level = { energy, weight: 0, overlap: [0, 0] }));
    // The real inner product of the embedding is Re<·|·>; with iφ in place of φ it is Im<φ|P|ψ>.
    level.weight += dot(column, detected, false) ** 2;
    level.overlap[0] += dot(column, detected, false) * dot(column, prepared, false);
    level.overlap[1] += dot(column, detected, true) * dot(column, prepared, false);
  }
  return levels;
}
