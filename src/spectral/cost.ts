/**
 * What a spectral measure will take, before anything is built: for the estimate of a sweep, for spreading points over jobs, and for the
 * memory limit. An upper bound in bytes; flops are of the route's leading term.
 */
import { defaultKernel } from '../linalg/default-kernel.js';
import type { Extent } from '../models/types.js';
import { SMALL } from './reduce.js';

export interface MeasureCost {
  /** peak of typed arrays alive at once, the matrix and the states included */
  readonly bytes: number;
  /** floating-point operations */
  readonly flops: number;
  /** 'tridiagonal-ql', 'householder-ql', or 'lanczos-ql' where Lanczos is tried first; then the cost is that of the turn to Householder */
  readonly route: 'tridiagonal-ql' | 'householder-ql' | 'lanczos-ql';
}

const BYTES = 8;
/** Sweeps of QL an eigenvalue, as a rule (1.7 on random matrices); each visits half the matrix on average. */
const QL_SWEEPS = 1.7;
const ROTATION_FLOPS = 18;
const ROW_FLOPS = 6;
/** φ, ψ, Hφ, rows of QL, reflectors and their like: vectors of length n alive at once, in real numbers. */
const VECTORS = 24;

export function measureCost(extent: Extent): MeasureCost {
  const n = extent.dimension;
  const planes = extent.complex ? 2 : 1;
  const vectors = VECTORS * planes * n * BYTES;
  // Two rows a plane: φ and ψ.
  const ql = QL_SWEEPS * 0.5 * n * n * (ROTATION_FLOPS + 2 * planes * ROW_FLOPS);
  if (extent.storage === 'tridiagonal') return { bytes: vectors + 2 * n * BYTES, flops: ql, route: 'tridiagonal-ql' };

  const complexFactor = extent.complex ? 4 : 1;
  const stored = extent.storage === 'dense' ? n * n * BYTES * planes : extent.nonzeros * (BYTES * planes + 4) + 4 * (n + 1);
  const packed = ((n * (n + 1)) / 2) * BYTES * planes;
  const householder = (4 / 3) * n ** 3 * complexFactor;
  if (extent.storage === 'dense' || n <= SMALL) {
    return { bytes: stored + vectors + packed, flops: householder + ql, route: 'householder-ql' };
  }
  const steps = Math.min(n, defaultKernel.lanczosLimit(n, !extent.complex));
  const lanczos = (2 * n * steps ** 2 + 2 * extent.nonzeros * steps) * complexFactor;
  const basis = n * steps * BYTES * planes;
  if (steps === n) return { bytes: 2 * stored + vectors + basis, flops: lanczos / 2 + ql, route: 'lanczos-ql' };
  // The basis (half the packed triangle) may still await collection when the triangle is allocated.
  return { bytes: stored + vectors + packed + basis, flops: lanczos + householder + ql, route: 'lanczos-ql' };
}
