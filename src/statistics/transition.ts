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
  let active = pairs.re.length;
  const re = new Float64Array(active);
  const im = new Float64Array(active);
  const xRe = new Float64Array(active);
  const xIm = new Float64Array(active);
  let total = fixedPart;
  for (let i = 0, p = 0; i < n; i++) {
    for (let j = i + 1; j < n; j++, p++) {
      // 2 q_i q_j*: the pair and its conjugate.
      re[p] = 2 * (qRe[i] * qRe[j] + qIm[i] * qIm[j]);
      im[p] = 2 * (qIm[i] * qRe[j] - qRe[i] * qIm[j]);
      xRe[p] = 1 - pairs.re[p];
      xIm[p] = -pairs.im[p];
      total += Math.hypot(re[p], im[p]);
    }
  }
  let steps = 0;
  const letGo = (): void => {
    const floor = (NEGLIGIBLE * total) / Math.max(1, re.length);
    let kept = 0;
    for (let p = 0; p < active; p++) {
      if (Math.abs(re[p]) + Math.abs(im[p]) <= floor) continue;
      re[kept] = re[p];
      im[kept] = im[p];
      xRe[kept] = xRe[p];
      xIm[kept] = xIm[p];
      kept++;
    }
    active = kept;
  };
  letGo();
  return {
    next() {
      if (++steps % SWEEP_EVERY === 0) letGo();
      let moving = 0;
      for (let p = 0; p < active; p++) {
        const a = re[p] * xRe[p] - im[p] * xIm[p];
        im[p] = re[p] * xIm[p] + im[p] * xRe[p];
        re[p] = a;
        moving += a;
      }
      return fixedPart + moving;
    },
    reach() {
      let sum = 0;
      for (let p = 0; p < active; p++) sum += Math.hypot(re[p], im[p]);
      return sum + NEGLIGIBLE * total;
    },
  };
}
