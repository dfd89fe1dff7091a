/**
 * Monitored evolution averaged over random intervals: R_k = K (X∘R_{k−1}) K, F_k = η t†(X∘R_{k−1})t, X_ij = χ(E_i − E_j), R_0 = a a†
 * (First-detection time of a quantum state under random probing, Phys. Rev. A 103, 022222 (2021), 10.1103/PhysRevA.103.022222).
 *
 * Elements are kept in units of t_i t_j, where the measurement turns into r_ij − c_i − c_j*, c = κû − κ²s/2, û = (X∘R)t in units of
 * t_i and s = t†(X∘R)t. One pass over the upper half applies the last measurement, the next interval and gathers û.
 *
 * Everything the pass touches lies in one array, records of five numbers for each level, then of four for each pair: the engine keeps
 * one base address and one length in registers. Measured against ten separate planes: 3.3 instead of 6.1 ns a pair.
 */
import type { IntervalDistribution } from '../schedules/types.js';
import type { SpectralMeasure } from '../spectral/types.js';
import type { Detection, DetectionOptions } from './detection.js';
import { pairComplements } from './pairs.js';
import { amplitudeReduction } from './stroboscopic.js';

/** Record of a level: v, Re c, Im c, Re û, Im û. Record of a pair: Re X, Im X, Re r, Im r. */
const LEVEL = 5;
const PAIR = 4;

export function averagedDetection(measure: SpectralMeasure, distribution: IntervalDistribution, options: DetectionOptions): Detection {
  const kept = withoutNegligible(measure, options.budget);
  const { weights } = kept;
  const n = weights.length;
  const memory = new Float64Array(LEVEL * n + (PAIR * n * (n - 1)) / 2);
  weights.forEach((weight, i) => (memory[LEVEL * i] = weight));
  const diagonal = load(kept, distribution, memory);
  const kappa = amplitudeReduction(options.efficiency);
  return {
    step() {
      for (let i = 0, at = 0; i < n; i++, at += LEVEL) {
        diagonal[i] -= 2 * memory[at + 1];
        memory[at + 3] = weights[i] * diagonal[i];
        memory[at + 4] = 0;
      }
      pass(memory, LEVEL * n);
      let s = 0;
      for (let at = 0; at < LEVEL * n; at += LEVEL) s += memory[at] * memory[at + 3];
      for (let at = 0; at < LEVEL * n; at += LEVEL) {
        memory[at + 1] = kappa * (memory[at + 3] - (kappa * s) / 2);
        memory[at + 2] = kappa * memory[at + 4];
      }
      return options.efficiency * Math.max(0, s);
    },
    remaining() {
      let sum = 0;
      for (let i = 0; i < n; i++) sum += weights[i] * (diagonal[i] - 2 * memory[LEVEL * i + 1]);
      return Math.max(0, sum);
    },
  };
}

/** Writes X and R_0 of every pair; returns the diagonal of R_0 in units of v. */
function load(measure: SpectralMeasure, distribution: IntervalDistribution, memory: Float64Array): Float64Array {
  const { weights, overlapRe, overlapIm } = measure;
  const n = weights.length;
  const pairs = pairComplements(measure, distribution);
  const aRe = overlapRe.map((value, i) => value / weights[i]);
  const aIm = overlapIm?.map((value, i) => value / weights[i]) ?? new Float64Array(n);
  for (let i = 0, p = 0, at = LEVEL * n; i < n; i++) {
    for (let j = i + 1; j < n; j++, p++, at += PAIR) {
      memory[at] = 1 - pairs.re[p];
      memory[at + 1] = -pairs.im[p];
      memory[at + 2] = aRe[i] * aRe[j] + aIm[i] * aIm[j];
      memory[at + 3] = aIm[i] * aRe[j] - aRe[i] * aIm[j];
    }
  }
  return aRe.map((value, i) => value * value + aIm[i] * aIm[i]);
}

/** The hot loop, a function of its own so that it is compiled as one. */
function pass(m: Float64Array, end: number): void {
  let at = end;
  for (let i = 0; i < end; i += LEVEL) {
    const v = m[i];
    const cRe = m[i + 1];
    const cIm = m[i + 2];
    let uRe = m[i + 3];
    let uIm = m[i + 4];
    for (let j = i + LEVEL; j < end; j += LEVEL, at += PAIR) {
      const xRe = m[at];
      const xIm = m[at + 1];
      const a = m[at + 2] - cRe - m[j + 1];
      const b = m[at + 3] - cIm + m[j + 2];
      const re = xRe * a - xIm * b;
      const im = xRe * b + xIm * a;
      m[at + 2] = re;
      m[at + 3] = im;
      const other = m[j];
      uRe += re * other;
      uIm += im * other;
      m[j + 3] += re * v;
      m[j + 4] -= im * v;
    }
    m[i + 3] = uRe;
    m[i + 4] = uIm;
  }
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
