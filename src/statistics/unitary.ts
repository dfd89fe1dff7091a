/**
 * What becomes of <|u(t_k)|²>, the averaged transition probability after k intervals: a recurrent part that stays and a decaying part.
 * Levels in one window of the resolution (winding.ts) count as one: within the budget their phases do not part.
 */
import type { IntervalDistribution } from '../schedules/types.js';
import type { SpectralMeasure } from '../spectral/types.js';
import type { PairTable } from './pairs.js';
import { staticWeight, transitionSteps } from './transition.js';
import type { Windows } from './winding.js';

/** Σ over windows of |Σ q_j|². With one level a window: the infinite-time average of the transition probability. */
export function recurrentWeight(measure: SpectralMeasure, windows: Windows): number {
  const re = new Float64Array(windows.count);
  const im = new Float64Array(windows.count);
  measure.overlapRe.forEach((value, i) => (re[windows.windowOf[i]] += value));
  measure.overlapIm?.forEach((value, i) => (im[windows.windowOf[i]] += value));
  return re.reduce((sum, value, w) => sum + value * value + im[w] * im[w], 0);
}

/** Pairs that carry less than this share of Σ_{i≠j} |q_i q_j| are not looked at for the decay rate. */
const CARRYING = 1e-6;

/**
 * −ln max |χ(E_i − E_j)| over the pairs of levels in different windows that carry more than 1e-6 of Σ_{i≠j} |q_i q_j|; per measurement.
 * 0 for a fixed interval, where |χ| = 1; null with no such pair.
 */
export function decayRate(
  measure: SpectralMeasure,
  distribution: IntervalDistribution,
  windows: Windows,
  pairs: PairTable | null,
): number | null {
  const size = measure.overlapRe.map((value, i) => Math.hypot(value, measure.overlapIm?.[i] ?? 0));
  const n = size.length;
  const total = size.reduce((sum, value) => sum + value, 0) ** 2 - size.reduce((sum, value) => sum + value * value, 0);
  let slowest = Infinity;
  for (let i = 0, p = 0; i < n; i++) {
    for (let j = i + 1; j < n; j++, p++) {
      if (windows.windowOf[i] === windows.windowOf[j] || !(2 * size[i] * size[j] > CARRYING * total)) continue;
      if (pairs === null) return 0;
      // |χ|² = 1 − 2 Re(1 − χ) + |1 − χ|².
      const { re, im } = pairs;
      slowest = Math.min(slowest, -0.5 * Math.log1p(re[p] * re[p] + im[p] * im[p] - 2 * re[p]));
    }
  }
  if (slowest === Infinity) return null;
  return distribution.random ? Math.max(0, slowest) : 0;
}

/** How near to the recurrent weight counts as settled. */
const SETTLED = 0.01;

/**
 * Least k such that |<|u(t_k')|²> − recurrent| ≤ 0.01 for every k' from k up to the budget; null where the last one still differs.
 * k counts from 1.
 */
export function settlingMeasurements(
  measure: SpectralMeasure,
  distribution: IntervalDistribution,
  pairs: PairTable | null,
  recurrent: number,
  budget: number,
): number | null {
  const steps = transitionSteps(measure, distribution, pairs ?? undefined);
  const offset = Math.abs(staticWeight(measure) - recurrent);
  let candidate = 1;
  for (let k = 1; k <= budget; k++) {
    // |χ| ≤ 1: once the moving part is this small no later value can leave the band.
    if (k % 8 === 1 && offset + steps.reach() <= SETTLED) break;
    if (Math.abs(steps.next() - recurrent) > SETTLED) candidate = k + 1;
  }
  return candidate > budget ? null : candidate;
}
