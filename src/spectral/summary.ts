/** Numbers that a measure alone tells: spread over levels, energy moments, spacings. */
import type { SpectralMeasure } from './types.js';

/** 1/Σ v²: between 1 and the number of levels (Quantum mechanical evolution towards thermal equilibrium, Phys. Rev. E 79, 061103 (2009), 10.1103/PhysRevE.79.061103, from memory). */
export function effectiveDimension(measure: SpectralMeasure): number {
  return 1 / measure.weights.reduce((total, v) => total + v * v, 0);
}

/** Σ v E and Σ v (E − mean)². */
export function energyMoments(measure: SpectralMeasure): { mean: number; variance: number } {
  const { energies, weights } = measure;
  const mean = weights.reduce((total, v, k) => total + v * energies[k], 0);
  const variance = weights.reduce((total, v, k) => total + v * (energies[k] - mean) * (energies[k] - mean), 0);
  return { mean, variance };
}

/** Least distance of neighbouring levels; null with one level. */
export function smallestGap(energies: Float64Array): number | null {
  let least = Infinity;
  for (let k = 1; k < energies.length; k += 1) least = Math.min(least, energies[k] - energies[k - 1]);
  return energies.length < 2 ? null : least;
}

/**
 * Mean of min(s, s')/max(s, s') over neighbouring spacings; null below three levels. Poisson levels give 2 ln 2 − 1, random symmetric
 * matrices 0.5307 (Distribution of the ratio of consecutive level spacings in random matrix ensembles, Phys. Rev. Lett. 110, 084101
 * (2013), 10.1103/PhysRevLett.110.084101).
 */
export function gapRatio(energies: Float64Array): number | null {
  if (energies.length < 3) return null;
  let total = 0;
  for (let k = 2; k < energies.length; k += 1) {
    const s = energies[k - 1] - energies[k - 2];
    const t = energies[k] - energies[k - 1];
    total += Math.min(s, t) / Math.max(s, t);
  }
  return total / (energies.length - 2);
}
