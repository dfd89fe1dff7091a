/** What a budget of K measurements shows: detections within it, the mean cut off at K, quantiles. */
import type { Detection } from './detection.js';

export interface BudgetStatistics {
  /** Σ_{k<K} S_k = E[min(n, K)]; runs that are never detected count K */
  readonly capped_mean: number;
  /** Σ_{n≤K} F_n */
  readonly detected_in_budget: number;
  /** least n with Σ_{m≤n} F_m ≥ P/2; null past the budget or with P = 0 */
  readonly median_measurements: number | null;
  /** the same for nine tenths of P */
  readonly p90_measurements: number | null;
}

/** A cumulative probability that equals its quantile up to rounding has reached it. */
const TIE = 1e-12;
/** Relative to the mean: what is left of the survival may be dropped. */
const NEGLIGIBLE = 1e-17;

/**
 * Takes up to `budget` steps; stops early once the rest can add nothing.
 * @param probability P, total detection probability: what `detection` starts with
 */
export function budgetStatistics(detection: Detection, probability: number, budget: number): BudgetStatistics {
  const quantiles = [0.5, 0.9];
  const reached: (number | null)[] = [null, null];
  let detected = 0;
  let capped = probability;
  let next = probability > 0 ? 0 : quantiles.length;
  let n = 0;
  while (n < budget) {
    n++;
    detected += detection.step();
    while (next < quantiles.length && detected >= (quantiles[next] - TIE) * probability) reached[next++] = n;
    if (n === budget) break;
    const left = detection.remaining();
    capped += left;
    if (left * (budget - n) <= NEGLIGIBLE * capped && next === quantiles.length) break;
  }
  return {
    capped_mean: capped + budget * (1 - probability),
    detected_in_budget: Math.min(detected, probability),
    median_measurements: reached[0],
    p90_measurements: reached[1],
  };
}
