/**
 * What double precision can tell apart. One place for the three limits, so that a kernel stops exactly where the spectral measure would
 * no longer notice.
 *
 * A stable reduction of an n × n matrix is exact for a matrix that differs by a modest multiple of ε‖H‖. Energies are therefore known to
 * that distance, and amplitudes to a modest multiple of nε. The multiples are derived in DEVELOPERS.md.
 */

/** Levels closer than this are one level. The unit is that of `norm`. */
export function mergingDistance(dimension: number, norm: number): number {
  return Math.max(64, 4 * dimension) * Number.EPSILON * norm;
}

/** A level is bright when its weight exceeds this; below it weights are indistinguishable from rounding of a reduction. */
export function brightThreshold(dimension: number): number {
  return (16 * dimension * Number.EPSILON) ** 2;
}

/** A coupling not above this part of ‖H‖ is rounding of H's own elements: a reduction ends there. */
export const BREAKDOWN = Number.EPSILON;
