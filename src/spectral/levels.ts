/**
 * Levels with weights: merging what double precision cannot tell apart, and dropping what it cannot see. All arrays are parallel and
 * ascending in energy.
 */
import { brightThreshold, mergingDistance } from '../linalg/precision.js';
import type { SpectralMeasure } from './types.js';

/** One entry an eigenvector; q is null for the return problem, where it equals the weights. */
export interface RawLevels {
  readonly energies: Float64Array;
  readonly weights: Float64Array;
  readonly overlap: { readonly re: Float64Array; readonly im: Float64Array | null } | null;
}

/**
 * The bright levels. Neighbours closer than the merging distance become one level with their weights (and overlaps) added and the mean of
 * their energies by weight: members of such a group have no weights of their own. Then levels not above the bright threshold are dropped.
 * @param dimension of the matrix that was reduced
 * @param norm bound of ‖H‖, in the unit of the energies
 */
export function brightLevels(raw: RawLevels, dimension: number, norm: number): SpectralMeasure {
  const distance = mergingDistance(dimension, norm);
  const threshold = brightThreshold(dimension);
  const energies: number[] = [];
  const weights: number[] = [];
  const overlapRe: number[] = [];
  const overlapIm: number[] = [];
  for (let from = 0; from < raw.energies.length;) {
    let to = from + 1;
    while (to < raw.energies.length && raw.energies[to] - raw.energies[to - 1] <= distance) to += 1;
    const weight = sum(raw.weights, from, to);
    if (weight > threshold) {
      // Taken from the first of the group, so that the mean keeps all digits.
      let shift = 0;
      for (let k = from; k < to; k += 1) shift += raw.weights[k] * (raw.energies[k] - raw.energies[from]);
      energies.push(raw.energies[from] + shift / weight);
      weights.push(weight);
      if (raw.overlap !== null) overlapRe.push(sum(raw.overlap.re, from, to));
      if (raw.overlap !== null && raw.overlap.im !== null) overlapIm.push(sum(raw.overlap.im, from, to));
    }
    from = to;
  }
  const v = Float64Array.from(weights);
  return {
    energies: Float64Array.from(energies),
    weights: v,
    overlapRe: raw.overlap === null ? v : Float64Array.from(overlapRe),
    overlapIm: raw.overlap === null || raw.overlap.im === null ? null : Float64Array.from(overlapIm),
  };
}

function sum(values: Float64Array, from: number, to: number): number {
  let total = 0;
  for (let k = from; k < to; k += 1) total += values[k];
  return total;
}
