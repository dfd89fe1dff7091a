/**
 * Monitored evolution averaged over random intervals: R_k = K (X∘R_{k−1}) K, F_k = η t†(X∘R_{k−1})t, X_ij = χ(E_i − E_j), R_0 = a a†
 * (First-detection time of a quantum state under random probing, Phys. Rev. A 103, 022222 (2021), 10.1103/PhysRevA.103.022222).
 *
 * The iteration itself has two forms, on vectors where WebAssembly runs and in TypeScript elsewhere; one process always takes the same.
 */
import { kernelsRun } from '../linalg/wasm/workspace.js';
import type { IntervalDistribution } from '../schedules/types.js';
import type { SpectralMeasure } from '../spectral/types.js';
import { scalarIteration } from './averaged-scalar.js';
import { vectorIteration } from './averaged-vector.js';
import type { Detection, DetectionOptions } from './detection.js';
import { amplitudeReduction } from './stroboscopic.js';

export function averagedDetection(measure: SpectralMeasure, distribution: IntervalDistribution, options: DetectionOptions): Detection {
  const kept = withoutNegligible(measure, options.budget);
  const iteration = (kernelsRun() ? vectorIteration : scalarIteration)(kept, distribution, amplitudeReduction(options.efficiency));
  return {
    step: () => options.efficiency * Math.max(0, iteration.step()),
    remaining: () => Math.max(0, iteration.remaining()),
    close: () => iteration.close(),
  };
}

/**
 * A level of weight v takes up at most v·k of the probability in k steps, and what it does to Σ_{k<K} S_k is below 2K²(v + |a|²). Levels
 * that together stay below 1e-13 are left out.
 */
function withoutNegligible(measure: SpectralMeasure, budget: number): SpectralMeasure {
  const { energies, weights, overlapRe, overlapIm } = measure;
  const floor = 1e-13 / (2 * budget * budget * energies.length);
  const kept = Array.from(energies.keys()).filter((i) => {
    const q = Math.hypot(overlapRe[i], overlapIm?.[i] ?? 0);
    return weights[i] + (q / weights[i]) * q > floor;
  });
  if (kept.length === energies.length) return measure;
  const pick = (values: Float64Array): Float64Array => Float64Array.from(kept, (i) => values[i]);
  return {
    energies: pick(energies),
    weights: pick(weights),
    overlapRe: pick(overlapRe),
    overlapIm: overlapIm === null ? null : pick(overlapIm),
  };
}
