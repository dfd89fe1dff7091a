/**
 * The spectral measure of a system: levels, weights and overlaps of its pair of states, without eigenvectors.
 *
 * Pure and deterministic: the same system and kernel give the same bits. A number that double precision cannot vouch for is not hidden:
 * the point carries a flag and a sentence that says why.
 */
import { WindrowError } from '../core/errors.js';
import { defaultKernel } from '../linalg/default-kernel.js';
import type { SpectralKernel } from '../linalg/kernel.js';
import { normBound } from '../linalg/norm.js';
import { mergingDistance } from '../linalg/precision.js';
import { innerProduct, squaredNorm } from '../linalg/vector.js';
import { validateVector } from '../linalg/validate.js';
import type { System } from '../models/types.js';
import { brightLevels } from './levels.js';
import { measureResidual, overlapResidual } from './moments.js';
import { reduce } from './reduce.js';
import { effectiveDimension, energyMoments, gapRatio, smallestGap } from './summary.js';
import type { Flag, MeasuredPoint } from './types.js';

/** A measure whose moments miss by more than this is doubtful. Sound ones stay below 1e-13 up to thousands of levels. */
const RESIDUAL_LIMIT = 1e-10;
/** Weights of two levels are uncertain by the merging distance over their gap: one part in sixteen here. */
const CLOSE_GAP = 16;
/** How far |φ| may be from 1, and |ψ| above it. */
const NORM_TOLERANCE = 1e-10;

/**
 * @param system H in the sector of φ, with φ a unit vector and |ψ| ≤ 1; `prepared === detected` (the same object) is the return problem
 * @returns energies in the unit of H, ascending
 * @throws WindrowError matrix.dimension, matrix.not-finite, state.invalid, kernel.no-convergence
 */
export function spectralMeasure(system: System, kernel: SpectralKernel = defaultKernel): MeasuredPoint {
  const { matrix, detected } = system;
  const prepared = system.prepared === detected ? null : system.prepared;
  checkStates(system);
  const norm = normBound(matrix);
  if (!Number.isFinite(norm)) {
    throw new WindrowError('matrix.not-finite', 'the Hamiltonian has elements that are not finite, or too large to add up', {
      found: `norm ${norm}`,
    });
  }
  const reduction = reduce(matrix, detected, prepared, kernel);
  const measure = brightLevels(reduction.levels, matrix.dimension, norm);
  const overlap = prepared === null ? ([1, 0] as const) : innerProduct(detected, prepared);

  const bright = measure.energies.length;
  const accessible = reduction.structuralDimension ?? bright;
  const gap = smallestGap(measure.energies);
  const residual = measureResidual(measure, matrix, detected, norm);
  const doubts: [Flag, string][] = [];
  if (!(residual <= RESIDUAL_LIMIT)) {
    doubts.push(['doubtful', `the moments of the measure miss those of H by ${residual.toExponential(1)}`]);
  } else if (prepared !== null && !(overlapResidual(measure, overlap) <= RESIDUAL_LIMIT)) {
    doubts.push(['doubtful', `the overlaps of the levels miss <φ|ψ> by ${overlapResidual(measure, overlap).toExponential(1)}`]);
  } else if (gap !== null && gap <= CLOSE_GAP * mergingDistance(matrix.dimension, norm)) {
    doubts.push(['doubtful', `levels ${gap.toExponential(1)} apart are at the limit of double precision at norm ${norm.toExponential(1)}`]);
  }
  if (bright < accessible) {
    doubts.push([
      'underresolved',
      `${accessible - bright} of ${accessible} levels are too faint or too close to another for double precision`,
    ]);
  }
  const { mean, variance } = energyMoments(measure);
  return {
    measure,
    fields: {
      hilbert_dimension: system.hilbertDimension,
      sector_dimension: system.sectorDimension,
      accessible_dimension: accessible,
      accessible_by: reduction.structuralDimension === null ? 'weights' : 'structure',
      bright_levels: bright,
      effective_dimension: effectiveDimension(measure),
      mean_energy: mean,
      energy_variance: variance,
      smallest_gap: gap,
      gap_ratio: gapRatio(measure.energies),
      measure_residual: residual,
      method: reduction.method,
      flags: doubts.map(([flag]) => flag),
      flag_reasons: doubts.map(([, reason]) => reason),
    },
    overlap,
  };
}

function checkStates(system: System): void {
  const { matrix, detected, prepared } = system;
  validateVector(detected, matrix.dimension, 'the detected state');
  validateVector(prepared, matrix.dimension, 'the prepared state');
  const phi = Math.sqrt(squaredNorm(detected));
  const psi = Math.sqrt(squaredNorm(prepared));
  if (Math.abs(phi - 1) <= NORM_TOLERANCE && psi <= 1 + NORM_TOLERANCE) return;
  throw new WindrowError('state.invalid', 'a state is not normalised', {
    found: `|φ| = ${phi}, |ψ| = ${psi}`,
    allowed: '|φ| = 1 and |ψ| ≤ 1',
  });
}
