/**
 * The levels a statistic works on: bright, normalised, and with those merged that no schedule can tell apart.
 *
 * Two levels with χ(E_i − E_j) = 1 carry the same phase in every interval: they act as one, with v and q added. That happens at the
 * exceptional intervals of a fixed schedule and at resonances of a lattice distribution. Whether two phases are equal is decided at
 * `phaseTolerance`, the uncertainty that rounding of the energies gives to a phase: max(64, 4n) ε max|E| <τ>.
 */
import { WindrowError } from '../core/errors.js';
import type { IntervalDistribution } from '../schedules/types.js';
import type { SpectralMeasure } from '../spectral/types.js';
import { pairComplements, pairRows, type PairTable, type Rows } from './pairs.js';

/** True where the overlaps are the weights: the prepared state is the detected one. */
export function isReturn(measure: SpectralMeasure): boolean {
  const { weights, overlapRe, overlapIm } = measure;
  if (overlapIm?.some((value) => value !== 0) === true) return false;
  return overlapRe === weights || overlapRe.every((value, i) => value === weights[i]);
}

/**
 * Levels with v > 0, weights scaled to sum 1 (they do up to rounding, and Q is a projector only if they do exactly).
 * @throws WindrowError statistics.undetectable where no level is bright
 */
export function brightPart(measure: SpectralMeasure): SpectralMeasure {
  const kept = Array.from(measure.weights.keys()).filter((i) => measure.weights[i] > 0);
  const total = kept.reduce((sum, i) => sum + measure.weights[i], 0);
  if (!(total > 0)) {
    throw new WindrowError('statistics.undetectable', 'the detected state has no bright level', {
      found: '0 bright levels',
      allowed: 'at least 1',
    });
  }
  const pick = (values: Float64Array): Float64Array => Float64Array.from(kept, (i) => values[i]);
  const weights = pick(measure.weights).map((weight) => weight / total);
  if (isReturn(measure)) return { energies: pick(measure.energies), weights, overlapRe: weights, overlapIm: null };
  const overlapIm = measure.overlapIm === null ? null : pick(measure.overlapIm);
  return { energies: pick(measure.energies), weights, overlapRe: pick(measure.overlapRe), overlapIm };
}

export interface MergedLevels {
  readonly measure: SpectralMeasure;
  /** 1 − χ between the levels of that measure */
  readonly pairs: Rows;
  /** two phases closer than this (radians) are one */
  readonly phaseTolerance: number;
  /** least |1 − χ| between two of the levels that are left; Infinity with one level */
  readonly closest: number;
}

/**
 * Merges the levels that the schedule cannot tell apart. The measure itself comes back where there are none.
 * @param table the pair table of the measure, where it is at hand
 */
export function mergeResonant(measure: SpectralMeasure, distribution: IntervalDistribution, table?: PairTable): MergedLevels {
  const { energies } = measure;
  const n = energies.length;
  const scale = energies.reduce((largest, energy) => Math.max(largest, Math.abs(energy)), 0);
  const phaseTolerance = Math.max(64, 4 * n) * Number.EPSILON * scale * distribution.mean;
  if (!distribution.random) {
    const group = phaseGroups(energies, distribution.mean, phaseTolerance);
    const merged = group === null ? measure : addUp(measure, group);
    return { measure: merged, pairs: pairRows(merged, distribution), phaseTolerance, closest: closestPhases(merged, distribution) };
  }
  const pairs = table ?? pairComplements(measure, distribution);
  const group = latticeGroups(pairs, distribution, phaseTolerance);
  const merged = group === null ? measure : addUp(measure, group);
  const left = group === null ? pairs : pairComplements(merged, distribution);
  const closest = left.re.reduce((least, re, p) => Math.min(least, Math.hypot(re, left.im[p])), Infinity);
  return { measure: merged, pairs: left, phaseTolerance, closest };
}

/** E_j τ mod 2π, in [0, 2π). */
export function phasesOf(energies: Float64Array, interval: number): Float64Array {
  return energies.map((energy) => {
    const phase = (energy * interval) % (2 * Math.PI);
    return phase < 0 ? phase + 2 * Math.PI : phase;
  });
}

/** Indices of the phases in ascending order around the circle, starting after the widest gap. */
export function aroundCircle(phases: Float64Array): Int32Array {
  const order = Int32Array.from(phases.keys()).sort((a, b) => phases[a] - phases[b]);
  const n = order.length;
  let start = 0;
  let widest = phases[order[0]] + 2 * Math.PI - phases[order[n - 1]];
  for (let k = 1; k < n; k++) {
    const gap = phases[order[k]] - phases[order[k - 1]];
    if (gap > widest) {
      widest = gap;
      start = k;
    }
  }
  return order.map((_, k) => order[(start + k) % n]);
}

/** Distance from one phase on to the next around the circle, in [0, 2π). */
export const phaseAhead = (from: number, to: number): number => (to >= from ? to - from : to - from + 2 * Math.PI);

function phaseGroups(energies: Float64Array, interval: number, tolerance: number): Int32Array | null {
  const phases = phasesOf(energies, interval);
  const order = aroundCircle(phases);
  const group = new Int32Array(energies.length);
  let groups = 0;
  for (let k = 1; k < order.length; k++) {
    if (phaseAhead(phases[order[k - 1]], phases[order[k]]) > tolerance) groups++;
    group[order[k]] = groups;
  }
  return groups + 1 === energies.length ? null : group;
}

function latticeGroups(pairs: PairTable, distribution: IntervalDistribution, tolerance: number): Int32Array | null {
  // Without a lattice |χ(x)| = 1 only at x = 0, and the levels of a measure are distinct.
  if (distribution.lattice === null) return null;
  const n = pairs.levels;
  const group = Int32Array.from({ length: n }, (_, i) => i);
  let merged = false;
  for (let i = 0, p = 0; i < n; i++) {
    for (let j = i + 1; j < n; j++, p++) {
      if (Math.hypot(pairs.re[p], pairs.im[p]) > tolerance || group[i] === group[j]) continue;
      merged = true;
      const from = group[j];
      for (let k = 0; k < n; k++) if (group[k] === from) group[k] = group[i];
    }
  }
  return merged ? group : null;
}

/** One level for every group, with the energy of its heaviest member. */
function addUp(measure: SpectralMeasure, group: Int32Array): SpectralMeasure {
  const names = [...new Set(group)];
  const sum = (values: Float64Array): Float64Array =>
    Float64Array.from(names, (name) => values.reduce((total, value, i) => (group[i] === name ? total + value : total), 0));
  const heaviest = names.map((name) =>
    group.reduce((best, g, i) => (g === name && (best < 0 || measure.weights[i] > measure.weights[best]) ? i : best), -1),
  );
  const order = names.map((_, k) => k).sort((a, b) => measure.energies[heaviest[a]] - measure.energies[heaviest[b]]);
  const arrange = (values: Float64Array): Float64Array => Float64Array.from(order, (k) => values[k]);
  const energies = Float64Array.from(order, (k) => measure.energies[heaviest[k]]);
  const weights = arrange(sum(measure.weights));
  if (isReturn(measure)) return { energies, weights, overlapRe: weights, overlapIm: null };
  const overlapIm = measure.overlapIm === null ? null : arrange(sum(measure.overlapIm));
  return { energies, weights, overlapRe: arrange(sum(measure.overlapRe)), overlapIm };
}

function closestPhases({ energies }: SpectralMeasure, distribution: IntervalDistribution): number {
  if (energies.length === 1) return Infinity;
  const order = aroundCircle(phasesOf(energies, distribution.mean));
  const out = new Float64Array(2);
  return order.reduce((least, level, k) => {
    distribution.complement(energies[level] - energies[order[(k + 1) % order.length]], out);
    return Math.min(least, Math.hypot(out[0], out[1]));
  }, Infinity);
}
