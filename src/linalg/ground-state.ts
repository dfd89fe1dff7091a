/**
 * The eigenvector of the lowest level, by restarted Lanczos iteration with full reorthogonalisation.
 *
 * Source of the iteration: An iteration method for the solution of the eigenvalue problem of linear differential and integral operators,
 * Journal of Research of the National Bureau of Standards 45, 255 (1950), 10.6028/jres.045.026 (from memory). Restarting from the Ritz
 * vector is common practice. Deterministic: the start vector is drawn from a fixed stream.
 */
import { randomStream } from '../core/random.js';
import { WindrowError } from '../core/errors.js';
import { applyMatrix, isComplexPair } from './apply.js';
import type { HermitianMatrix, StateVector } from './matrix.js';
import { normBound } from './norm.js';
import { tridiagonalEigen } from './reference/tridiagonal-ql.js';
import { innerProduct, squaredNorm, zeroVector } from './vector.js';

export interface GroundState {
  readonly energy: number;
  /** unit vector; its largest component is real and positive */
  readonly vector: StateVector;
  /** Distance to the next level, multiplicity counted; Infinity in one dimension. */
  readonly gap: number;
}

/** Vectors kept between restarts: 2.4 kB a row. */
const BASIS = 300;
const RESTARTS = 60;
/** Steps between looks at the residual. */
const CHECKED = 16;
/** Residual of the ground state and of the level above it, relative to ‖H‖. */
const SHARP = 8 * Number.EPSILON;
const ROUGH = 1e-9;

interface Pair {
  readonly energy: number;
  readonly vector: StateVector;
}

/**
 * @returns the vector is accurate to about 1e-15‖H‖/gap
 * @throws WindrowError kernel.no-convergence
 */
export function groundState(matrix: HermitianMatrix): GroundState {
  const norm = normBound(matrix);
  const lowest = lowestPair(matrix, [], SHARP * norm);
  const gap = matrix.dimension === 1 ? Infinity : lowestPair(matrix, [lowest.vector], ROUGH * norm).energy - lowest.energy;
  turnReal(lowest.vector);
  return { ...lowest, gap };
}

/** The lowest eigenpair orthogonal to `known`. */
function lowestPair(matrix: HermitianMatrix, known: readonly StateVector[], tolerance: number): Pair {
  const n = matrix.dimension;
  const complex = isComplexPair(matrix, { re: new Float64Array(0), im: null });
  const stream = randomStream(known.length, 'start of the ground-state iteration');
  let start = zeroVector(n, complex);
  for (const plane of planesOf(start)) for (let i = 0; i < n; i += 1) plane[i] = stream.normal();
  let best = Infinity;
  for (let restart = 0; restart < RESTARTS; restart += 1) {
    const { pair, residual, exhausted } = iterate(matrix, known, start, tolerance);
    // Rounding bounds the residual from below: where a restart no longer halves it, that is what there is.
    const settled = residual <= 1000 * tolerance && residual > best / 2;
    if (exhausted || residual <= tolerance || settled) return pair;
    best = Math.min(best, residual);
    start = pair.vector;
  }
  throw new WindrowError('kernel.no-convergence', 'the iteration for a ground state did not converge', {
    found: `a residual of ${best.toExponential(1)}`,
    allowed: tolerance.toExponential(1),
  });
}

/** One run until the residual of the lowest Ritz pair is below the tolerance, or of BASIS steps; exhausted where the basis spans all that the start vector reaches. */
function iterate(
  matrix: HermitianMatrix,
  known: readonly StateVector[],
  start: StateVector,
  tolerance: number,
): { readonly pair: Pair; readonly residual: number; readonly exhausted: boolean } {
  const n = matrix.dimension;
  const steps = Math.min(BASIS, n - known.length);
  const basis: StateVector[] = [];
  const alpha: number[] = [];
  const beta: number[] = [];
  let q = start;
  orthogonalise(q, known);
  scale(q, 1 / Math.sqrt(squaredNorm(q)));
  let residual: number;
  for (;;) {
    basis.push(q);
    const w = zeroVector(n, q.im !== null);
    applyMatrix(matrix, q, w);
    alpha.push(innerProduct(q, w)[0]);
    const before = Math.sqrt(squaredNorm(w));
    orthogonalise(w, [...known, ...basis]);
    orthogonalise(w, [...known, ...basis]);
    residual = Math.sqrt(squaredNorm(w));
    if (basis.length === steps || residual <= 4 * Number.EPSILON * before) break;
    if (basis.length % CHECKED === 0 && residual * lastComponent(alpha, beta) <= tolerance) break;
    beta.push(residual);
    scale(w, 1 / residual);
    q = w;
  }
  const m = basis.length;
  const rows = basis.map((_, k) => Float64Array.from({ length: m }, (__, j) => (j === k ? 1 : 0)));
  const [energy] = tridiagonalEigen(Float64Array.from(alpha), Float64Array.from(beta), rows);
  const vector = zeroVector(n, start.im !== null);
  basis.forEach((part, k) => {
    addTimes(vector, part, -rows[k][0], 0);
  });
  scale(vector, 1 / Math.sqrt(squaredNorm(vector)));
  return { pair: { energy, vector }, residual: residual * Math.abs(rows[m - 1][0]), exhausted: m === n - known.length };
}

/** Modulus of the last component of the lowest eigenvector of T. */
function lastComponent(alpha: readonly number[], beta: readonly number[]): number {
  const last = new Float64Array(alpha.length);
  last[alpha.length - 1] = 1;
  tridiagonalEigen(Float64Array.from(alpha), Float64Array.from(beta), [last]);
  return Math.abs(last[0]);
}

const planesOf = (x: StateVector): Float64Array[] => (x.im === null ? [x.re] : [x.re, x.im]);

function scale(x: StateVector, factor: number): void {
  for (const plane of planesOf(x)) for (let i = 0; i < plane.length; i += 1) plane[i] *= factor;
}

/** x ← x − (re + i·im) y */
function addTimes(x: StateVector, y: StateVector, re: number, im: number): void {
  for (let i = 0; i < x.re.length; i += 1) {
    const yIm = y.im === null ? 0 : y.im[i];
    x.re[i] -= re * y.re[i] - im * yIm;
    if (x.im !== null) x.im[i] -= re * yIm + im * y.re[i];
  }
}

function orthogonalise(x: StateVector, against: readonly StateVector[]): void {
  for (const y of against) {
    const [re, im] = innerProduct(y, x);
    addTimes(x, y, re, im);
  }
}

/** Multiplies by the phase that makes the component of largest modulus real and positive. */
function turnReal(x: StateVector): void {
  let largest = 0;
  let at = 0;
  for (let i = 0; i < x.re.length; i += 1) {
    const size = Math.hypot(x.re[i], x.im === null ? 0 : x.im[i]);
    // Components that rounding alone tells apart: the first of them is taken.
    if (size > largest * (1 + 1e-6)) [largest, at] = [size, i];
  }
  const re = x.re[at] / largest;
  const im = x.im === null ? 0 : -x.im[at] / largest;
  for (let i = 0; i < x.re.length; i += 1) {
    const [a, b] = [x.re[i], x.im === null ? 0 : x.im[i]];
    x.re[i] = re * a - im * b;
    if (x.im !== null) x.im[i] = re * b + im * a;
  }
}
