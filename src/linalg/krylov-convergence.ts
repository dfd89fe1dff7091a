/**
 * When a Lanczos iteration has found everything its start vector can reach.
 *
 * The residual at the step where the Krylov space is exhausted is rounding *amplified* by the iteration, 1e-8‖H‖ as a rule, so no threshold
 * on it tells the dimension. Instead the Ritz pairs are asked: one whose residual is below the merging distance is a level of H. When the
 * pairs that are not yet so carry, all together, no more weight of φ than the least weight that counts as bright, φ lies within a space
 * that is invariant under H to rounding, and no level outside it can be bright. This also ends the iteration early in localised regimes,
 * where φ reaches few levels of many.
 */
import type { SpectralKernel } from './kernel.js';
import { brightThreshold, mergingDistance } from './precision.js';

/** Steps after which to ask, in geometric progression: asking costs O(m²) at m steps. */
export const FIRST_CHECK = 8;
export const nextCheck = (steps: number): number => Math.ceil(1.2 * steps) + 4;

/**
 * @param alpha, beta T so far, scaled to norm one; beta is one shorter
 * @param residual length of the last residual
 * @param dimension of H
 * @param norm bound of ‖H‖ in the same scale
 */
export function krylovConverged(
  alpha: Float64Array,
  beta: Float64Array,
  residual: number,
  dimension: number,
  norm: number,
  eigen: SpectralKernel['eigen'],
): boolean {
  // The floor of the merging distance: at any n, the residual leaves a level where it is.
  const tolerance = mergingDistance(dimension, norm);
  const threshold = brightThreshold(dimension);
  if (stillCoupled(alpha, beta, (Math.sqrt(alpha.length) * tolerance) / residual + Math.sqrt(threshold))) return false;
  const m = alpha.length;
  const first = new Float64Array(m);
  const last = new Float64Array(m);
  first[0] = 1;
  last[m - 1] = 1;
  eigen(alpha, beta, [first, last]);
  let open = 0;
  for (let k = 0; k < m; k += 1) if (residual * Math.abs(last[k]) > tolerance) open += first[k] * first[k];
  return open <= threshold;
}

/**
 * A necessary condition in O(m): with f and l the first and last components of the eigenvectors of T, convergence bounds Σ|f l| by `limit`
 * and so |e_1ᵀ(T − x − iy)⁻¹e_m| by limit/y, whatever x and y are. That element is the product of the off-diagonals over the pivots of
 * T − x − iy. A y below the spacing of levels lets it decay little where the two ends are still coupled.
 */
function stillCoupled(alpha: Float64Array, beta: Float64Array, limit: number): boolean {
  const m = alpha.length;
  const x = alpha[0];
  const y = 0.25 / m;
  let re = 0;
  let im = -y;
  let logarithm = -Math.log(Math.hypot(re, im));
  for (let k = 1; k < m; k += 1) {
    const b = beta[k - 1];
    const factor = (b * b) / (re * re + im * im);
    re = alpha[k] - x - factor * re;
    im = -y + factor * im;
    logarithm += Math.log(b) - 0.5 * Math.log(re * re + im * im);
  }
  return logarithm > Math.log(limit / y);
}
