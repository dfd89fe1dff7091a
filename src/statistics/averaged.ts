/**
 * Monitored evolution averaged over random intervals: R_k = K (X∘R_{k−1}) K, F_k = η t†(X∘R_{k−1})t, X_ij = χ(E_i − E_j), R_0 = a a†
 * (First-detection time of a quantum state under random probing, Phys. Rev. A 103, 022222 (2021), 10.1103/PhysRevA.103.022222).
 *
 * Elements are kept in units of t_i t_j, where the measurement turns into r_ij − c_i − c_j*, c = κû − κ²s/2, û = (X∘R)t in units of
 * t_i and s = t†(X∘R)t. One pass over the upper half, in split planes, applies the last measurement, the next interval and gathers û.
 */
import type { IntervalDistribution } from '../schedules/types.js';
import type { SpectralMeasure } from '../spectral/types.js';
import type { Detection, DetectionOptions } from './detection.js';
import { pairComplements } from './pairs.js';
import { amplitudeReduction } from './stroboscopic.js';

export function averagedDetection(measure: SpectralMeasure, distribution: IntervalDistribution, options: DetectionOptions): Detection {
  const { energies, weights, overlapRe, overlapIm } = withoutNegligible(measure, options.budget);
  const n = energies.length;
  const pairs = pairComplements({ energies, weights, overlapRe, overlapIm }, distribution);
  const xRe = pairs.re.map((value) => 1 - value);
  const xIm = pairs.im.map((value) => -value);
  const kappa = amplitudeReduction(options.efficiency);

  // Prepared state in units of t.
  const aRe = overlapRe.map((value, i) => value / weights[i]);
  const aIm = overlapIm?.map((value, i) => value / weights[i]) ?? new Float64Array(n);
  const rRe = new Float64Array(xRe.length);
  const rIm = new Float64Array(xRe.length);
  for (let i = 0, p = 0; i < n; i++) {
    for (let j = i + 1; j < n; j++, p++) {
      rRe[p] = aRe[i] * aRe[j] + aIm[i] * aIm[j];
      rIm[p] = aIm[i] * aRe[j] - aRe[i] * aIm[j];
    }
  }
  const diagonal = aRe.map((value, i) => value * value + aIm[i] * aIm[i]);
  const cRe = new Float64Array(n);
  const cIm = new Float64Array(n);
  const uRe = new Float64Array(n);
  const uIm = new Float64Array(n);

  return {
    step() {
      for (let i = 0; i < n; i++) {
        diagonal[i] -= 2 * cRe[i];
        uRe[i] = weights[i] * diagonal[i];
        uIm[i] = 0;
      }
      pass(n, weights, xRe, xIm, rRe, rIm, cRe, cIm, uRe, uIm);
      let s = 0;
      for (let i = 0; i < n; i++) s += weights[i] * uRe[i];
      for (let i = 0; i < n; i++) {
        cRe[i] = kappa * (uRe[i] - (kappa * s) / 2);
        cIm[i] = kappa * uIm[i];
      }
      return options.efficiency * Math.max(0, s);
    },
    remaining() {
      let sum = 0;
      for (let i = 0; i < n; i++) sum += weights[i] * (diagonal[i] - 2 * cRe[i]);
      return Math.max(0, sum);
    },
  };
}

/** The hot loop, a function of its own so that it is compiled as one. */
function pass(
  n: number,
  v: Float64Array,
  xRe: Float64Array,
  xIm: Float64Array,
  rRe: Float64Array,
  rIm: Float64Array,
  cRe: Float64Array,
  cIm: Float64Array,
  uRe: Float64Array,
  uIm: Float64Array,
): void {
  for (let i = 0, p = 0; i < n; i++) {
    const ciRe = cRe[i];
    const ciIm = cIm[i];
    const vi = v[i];
    let sumRe = uRe[i];
    let sumIm = uIm[i];
    for (let j = i + 1; j < n; j++, p++) {
      const a = rRe[p] - ciRe - cRe[j];
      const b = rIm[p] - ciIm + cIm[j];
      const re = xRe[p] * a - xIm[p] * b;
      const im = xRe[p] * b + xIm[p] * a;
      rRe[p] = re;
      rIm[p] = im;
      const vj = v[j];
      sumRe += re * vj;
      sumIm += im * vj;
      uRe[j] += re * vi;
      uIm[j] -= im * vi;
    }
    uRe[i] = sumRe;
    uIm[i] = sumIm;
  }
}

/**
 * A level of weight v takes up at most v·k of the probability in k steps, and what it does to Σ_{k<K} S_k is below 2K²(v + |a|²). Levels
 * that together stay below 1e-15 are left out.
 */
function withoutNegligible(measure: SpectralMeasure, budget: number): SpectralMeasure {
  const { energies, weights, overlapRe, overlapIm } = measure;
  const floor = 1e-15 / (2 * budget * budget * energies.length);
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
