/**
 * Winding numbers at a resolution (δ, ε): the bright levels are covered from below by the least number of windows of width δ (greedy:
 * a window opens at the lowest level not yet covered), windows that hold a total weight < ε are dropped, the rest is counted.
 *
 * With random intervals the windows lie on the energy axis. With a fixed interval they cover the phases E_j τ on the circle with
 * width δτ, starting after the widest gap. δ is in energy units, ε is a weight. As δ → 0 and ε → 0 the count becomes the winding number of the
 * generating function of the first-detection amplitudes: the number of distinct energies or phases (Recurrence for discrete time
 * unitary evolutions, Commun. Math. Phys. 320, 543 (2013), 10.1007/s00220-012-1645-2).
 */
import type { IntervalDistribution } from '../schedules/types.js';
import type { SpectralMeasure } from '../spectral/types.js';
import { aroundCircle, phaseAhead, phasesOf } from './levels.js';

export interface Windows {
  /** for every level the number of its window, from 0 */
  readonly windowOf: Int32Array;
  readonly count: number;
}

/** Covers the levels (energies ascending) by windows of width `energy`. */
export function coverLevels(measure: SpectralMeasure, distribution: IntervalDistribution, energy: number): Windows {
  return distribution.random
    ? coverLine(measure.energies, energy)
    : coverCircle(measure.energies, distribution.mean, energy * distribution.mean);
}

function coverLine(energies: Float64Array, width: number): Windows {
  const windowOf = new Int32Array(energies.length);
  let low = energies[0];
  let window = 0;
  for (let i = 1; i < energies.length; i++) {
    if (energies[i] - low > width) {
      low = energies[i];
      window++;
    }
    windowOf[i] = window;
  }
  return { windowOf, count: window + 1 };
}

function coverCircle(energies: Float64Array, interval: number, width: number): Windows {
  const phases = phasesOf(energies, interval);
  const order = aroundCircle(phases);
  const windowOf = new Int32Array(energies.length);
  let low = phases[order[0]];
  let window = 0;
  for (let k = 1; k < order.length; k++) {
    const phase = phases[order[k]];
    if (phaseAhead(low, phase) > width) {
      low = phase;
      window++;
    }
    windowOf[order[k]] = window;
  }
  return { windowOf, count: window + 1 };
}

/** A weight sum that equals the threshold up to rounding counts. */
const TIE = 1 - 1e-12;

/** Number of windows that hold at least `weight` of the detected state. */
export function windingNumber(measure: SpectralMeasure, windows: Windows, weight: number): number {
  const held = new Float64Array(windows.count);
  measure.weights.forEach((value, i) => (held[windows.windowOf[i]] += value));
  return held.reduce((count, value) => (value >= weight * TIE ? count + 1 : count), 0);
}
