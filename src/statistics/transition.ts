/**
 * Unitary evolution observed once, after k intervals: <|u(t_k)|²> = Σ_ij q_i q_j* χ(E_i − E_j)^k, u(t) = Σ q_j exp(−i E_j t), averaged
 * over the intervals. (Randomly repeated measurements on quantum systems: correlations and topological invariants of the quantum
 * evolution, J. Phys. A 54, 395302 (2021); χ(x) = E exp(−i x τ) fixes the order of q and q*.)
 *
 * Random intervals take O(pairs that still count) a step: pairs that can no longer change the sum by more than 1e-13 of Σ|q_i q_j| are
 * let go. A fixed interval takes O(n) a step.
 */
import type { IntervalDistribution } from '../schedules/types.js';
import type { SpectralMeasure } from '../spectral/types.js';
import { pairComplements, type PairTable } from './pairs.js';

export interface TransitionSteps {
  /** <|u(t_k)|²> for k = 1, 2, … */
  next(): number;
  /** Largest distance that a later value can still have from the static part Σ|q_j|². */
  reach(): number;
}

/** @param pairs the pair table of the same measure, where it is at hand */
export function transitionSteps(measure: SpectralMeasure, distribution: IntervalDistribution, pairs?: PairTable): TransitionSteps {
  if (!distribution.random) return stroboscopicTransition(measure, distribution.mean);
  return averagedTransition(measure, pairs ?? pairComplements(measure, distribution));
}

/** <|u(t_k)|²> for k = 0 … count; index k. */
export function transitionSeries(measure: SpectralMeasure, distribution: IntervalDistribution, count: number): Float64Array {
  const steps = transitionSteps(measure, distribution);
  const im = measure.overlapIm?.reduce((sum, value) => sum + value, 0) ?? 0;
  const re = measure.overlapRe.reduce((sum, value) => sum + value, 0);
  const series = new Float64Array(count + 1);
  series[0] = re * re + im * im;
  for (let k = 1; k <= count; k++) series[k] = steps.next();
  return series;
}

/** Σ|q_j|². */
export function staticWeight(measure: SpectralMeasure): number {
  const { overlapRe, overlapIm } = measure;
  return overlapRe.reduce((sum, value, i) => sum + value * value + (overlapIm === null ? 0 : overlapIm[i] * overlapIm[i]), 0);
}

function stroboscopicTransition(measure: SpectralMeasure, interval: number): TransitionSteps {
  const n = measure.energies.length;
  const re = measure.overlapRe.slice();
  const im = measure.overlapIm?.slice() ?? new Float64Array(n);
  const cos = measure.energies.map((energy) => Math.cos(energy * interval));
  const sin = measure.energies.map((energy) => Math.sin(energy * interval));
  return {
    next() {
      let sumRe = 0;
      let sumIm = 0;
      for (let i = 0; i < n; i++) {
        const a = re[i] * cos[i] + im[i] * sin[i];
        const b = im[i] * cos[i] - re[i] * sin[i];
        re[i] = a;
        im[i] = b;
        sumRe += a;
        sumIm += b;
      }
      return sumRe * sumRe + sumIm * sumIm;
    },
    reach: () => Infinity,
  };
}

const NEGLIGIBLE = 1e-13;
const SWEEP_EVERY = 16;

function averagedTransition(measure: SpectralMeasure, pairs: PairTable): TransitionSteps {
  const n = measure.energies.length;
  const { overlapRe: qRe, overlapIm } = measure;
  const qIm = overlapIm ?? new Float64Array(n);
  const fixedPart = staticWeight(measure);
  // One array, records of Re and Im of 2 q_i q_j* χ^k (a pair and its conjugate) and of χ; averaged.ts tells why.
  const memory = new Float64Array(4 * pairs.re.length);
  let end = memory.length;
  let total = fixedPart;
  for (let i = 0, p = 0, at = 0; i < n; i++) {
    for (let j = i + 1; j < n; j++, p++, at += 4) {
      memory[at] = 2 * (qRe[i] * qRe[j] + qIm[i] * qIm[j]);
      memory[at + 1] = 2 * (qIm[i] * qRe[j] - qRe[i] * qIm[j]);
      memory[at + 2] = 1 - pairs.re[p];
      memory[at + 3] = -pairs.im[p];
      total += Math.hypot(memory[at], memory[at + 1]);
    }
  }
  const floor = (NEGLIGIBLE * total) / Math.max(1, pairs.re.length);
  let steps = 0;
  end = letGo(memory, end, floor);
  return {
    next() {
      if (++steps % SWEEP_EVERY === 0) end = letGo(memory, end, floor);
      return fixedPart + advance(memory, end);
    },
    reach() {
      let sum = NEGLIGIBLE * total;
      for (let at = 0; at < end; at += 4) sum += Math.hypot(memory[at], memory[at + 1]);
      return sum;
    },
  };
}

/** Drops the records that have become negligible; returns where the rest ends. */
function letGo(memory: Float64Array, end: number, floor: number): number {
  let to = 0;
  for (let from = 0; from < end; from += 4) {
    if (Math.abs(memory[from]) + Math.abs(memory[from + 1]) <= floor) continue;
    if (to !== from) for (let k = 0; k < 4; k++) memory[to + k] = memory[from + k];
    to += 4;
  }
  return to;
}

/** Multiplies every record by its χ; returns the sum of the real parts. */
function advance(m: Float64Array, end: number): number {
  let sum = 0;
  for (let at = 0; at < end; at += 4) {
    const a = m[at];
    const b = m[at + 1];
    const xRe = m[at + 2];
    const xIm = m[at + 3];
    const re = a * xRe - b * xIm;
    m[at] = re;
    m[at + 1] = a * xIm + b * xRe;
    sum += re;
  }
  return sum;
}
