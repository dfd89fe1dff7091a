/**
 * Monitored evolution step by step: F_n, the probability that measurement n is the first to click, and the survival S_n.
 *
 * After each interval the detected state φ is measured with efficiency η. A click, of probability η<φ|ρ|φ>, ends the run; without one
 * the state becomes K ρ K, K = 1 − κ|φ><φ|, κ = 1 − √(1−η). A fixed interval moves a state vector, O(n) a step
 * (stroboscopic.ts); random intervals, averaged over, move a density matrix, O(n²) a step (averaged.ts). Both work in the bright space
 * only, where the state shrinks to nothing, so that what is left is known to full relative accuracy.
 */
import type { IntervalDistribution } from '../schedules/types.js';
import type { SpectralMeasure } from '../spectral/types.js';
import { averagedDetection } from './averaged.js';
import type { Detection, DetectionOptions } from './detection.js';
import { brightPart } from './levels.js';
import { detectionProbability } from './moments.js';
import { stroboscopicDetection } from './stroboscopic.js';

/** @param measure levels with v > 0 and Σ v = 1, see levels.ts */
export function monitoredDetection(measure: SpectralMeasure, distribution: IntervalDistribution, options: DetectionOptions): Detection {
  return distribution.random
    ? averagedDetection(measure, distribution, options)
    : stroboscopicDetection(measure, distribution.mean, options.efficiency);
}

export interface DetectionSeries {
  /** F_n at index n = 0 … count; F_0 = 0 */
  readonly detection: Float64Array;
  /** S_n = 1 − Σ_{m≤n} F_m at index n; S_0 = 1. It ends at the weight that is never detected. */
  readonly survival: Float64Array;
}

/** F_n and S_n up to `count` measurements. */
export function detectionSeries(
  measure: SpectralMeasure,
  distribution: IntervalDistribution,
  count: number,
  efficiency = 1,
): DetectionSeries {
  const bright = brightPart(measure);
  const steps = monitoredDetection(bright, distribution, { efficiency, budget: Math.max(1, count) });
  const dark = 1 - detectionProbability(bright);
  const detection = new Float64Array(count + 1);
  const survival = new Float64Array(count + 1).fill(1);
  for (let n = 1; n <= count; n++) {
    detection[n] = steps.step();
    survival[n] = dark + steps.remaining();
  }
  steps.close();
  return { detection, survival };
}
