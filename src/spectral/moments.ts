/** Checks of a measure against H itself: what the levels say about φ must be what H says. */
import { applyMatrix, isComplexPair } from '../linalg/apply.js';
import type { HermitianMatrix, StateVector } from '../linalg/matrix.js';
import { unitScale } from '../linalg/norm.js';
import { innerProduct, squaredNorm, zeroVector } from '../linalg/vector.js';
import type { SpectralMeasure } from './types.js';

/**
 * The largest error of Σv = 1, Σ v E = <φ|H|φ> and Σ v E² = <φ|H²|φ>, relative to 1, ‖H‖ and ‖H‖².
 * @param norm bound of ‖H‖
 */
export function measureResidual(measure: SpectralMeasure, matrix: HermitianMatrix, detected: StateVector, norm: number): number {
  const scale = unitScale(norm);
  const image = zeroVector(matrix.dimension, isComplexPair(matrix, detected));
  applyMatrix(matrix, detected, image);
  for (const plane of [image.re, image.im]) if (plane !== null) for (let k = 0; k < plane.length; k += 1) plane[k] *= scale;
  let total = 0;
  let first = 0;
  let second = 0;
  measure.energies.forEach((energy, k) => {
    const e = energy * scale;
    total += measure.weights[k];
    first += measure.weights[k] * e;
    second += measure.weights[k] * e * e;
  });
  const unit = norm === 0 ? 1 : norm * scale;
  return Math.max(
    Math.abs(total - 1),
    Math.abs(first - innerProduct(detected, image)[0]) / unit,
    Math.abs(second - squaredNorm(image)) / unit ** 2,
  );
}

/** |Σ q − <φ|ψ>|. */
export function overlapResidual(measure: SpectralMeasure, overlap: readonly [number, number]): number {
  const sum = (values: Float64Array | null): number => values?.reduce((total, x) => total + x, 0) ?? 0;
  return Math.hypot(sum(measure.overlapRe) - overlap[0], sum(measure.overlapIm) - overlap[1]);
}
