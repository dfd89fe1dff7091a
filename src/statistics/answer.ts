/**
 * One question put to a measure: every field of a cell, with the reasons where a number must not be taken at face value.
 *
 * Pure and deterministic. Fields that double precision cannot give are null, never noise: the cell is then `underresolved` and says
 * which. `doubtful` is kept for cells none of whose numbers can be relied on. `resolution-sensitive`: the winding number changes when
 * the resolution is doubled or halved. The flags of the point itself stand with the point and are not repeated.
 */
import { buildSchedule } from '../schedules/registry.js';
import type { IntervalDistribution } from '../schedules/types.js';
import type { Flag, MeasuredPoint } from '../spectral/types.js';
import { budgetStatistics, type BudgetStatistics } from './budget.js';
import { brightPart, isReturn, mergeResonant, type MergedLevels } from './levels.js';
import { detectionMoments, detectionProbability, type DetectionMoments } from './moments.js';
import { monitoredDetection } from './monitored.js';
import { pairComplements } from './pairs.js';
import { sampledWinding } from './sampled.js';
import type { CellFields, Question } from './types.js';
import { decayRate, recurrentWeight, settlingMeasurements } from './unitary.js';
import { coverLevels, windingNumber } from './winding.js';

/** Phases known worse than this (radians) make every interference term a guess. */
const PHASE_LIMIT = 1e-3;
/** Phase differences must exceed their uncertainty by this factor for moments that diverge as they close. */
const CLOSEST_RATIO = 100;
/** Below this weight a level's weight has fewer than six digits (measured for the eigenvalue kernels), and the variance goes as 1/v. */
const LEAST_WEIGHT = 1e-25;
/** Overlaps are known to 16 n ε, as is the threshold of bright levels. */
const OVERLAP_ROUNDING = 16 * Number.EPSILON;
/** Largest relative error of a mean that is still printed. */
const MEAN_ERROR = 1e-6;

/**
 * @throws WindrowError schedule.unknown, schedule.parameter; statistics.undetectable where the detected state has no bright level
 */
export function answer(measured: MeasuredPoint, question: Question): CellFields {
  const { budget, sampling } = question;
  const efficiency = question.detector.efficiency;
  const distribution = buildSchedule(question.schedule);
  const bright = brightPart(measured.measure);
  const notes = new Map<Flag, string>();

  const { energy, weight } = usedResolution(question, distribution);
  const windows = coverLevels(bright, distribution, energy);
  const winding = windingNumber(bright, windows, weight);
  const low = windingNumber(bright, coverLevels(bright, distribution, 2 * energy), 2 * weight);
  const high = windingNumber(bright, coverLevels(bright, distribution, energy / 2), weight / 2);
  if (low !== winding || high !== winding) {
    notes.set('resolution-sensitive', `the winding number is ${low}, ${winding}, ${high} at twice, once and half the resolution`);
  }

  const pairs = distribution.random ? pairComplements(bright, distribution) : null;
  const recurrent = recurrentWeight(bright, windows);
  const overlap = measured.overlap[0] ** 2 + measured.overlap[1] ** 2;

  const levels = mergeResonant(bright, distribution, pairs ?? undefined);
  if (levels.phaseTolerance > PHASE_LIMIT) {
    notes.set(
      'doubtful',
      `phases over one interval are known only to ${levels.phaseTolerance.toExponential(1)} rad: the interval is too long for these energies`,
    );
  }
  const probability = visibleProbability(levels);
  const moments =
    probability > 0 ? resolvedMoments(levels, detectionMoments(levels.measure, distribution, efficiency, levels.pairs), notes) : null;
  const detection = monitoredDetection(levels.measure, distribution, { efficiency, budget });
  const within: BudgetStatistics = budgetStatistics(detection, probability, budget);
  detection.close();
  const sampled = sampling === null ? null : sampledWinding(bright, distribution, budget, sampling, efficiency);

  return {
    recurrent_weight: recurrent,
    decaying_weight: overlap - recurrent,
    decay_rate: decayRate(bright, distribution, windows, pairs),
    settling_measurements: settlingMeasurements(bright, distribution, pairs, recurrent, budget),
    winding_number: winding,
    winding_low: low,
    winding_high: high,
    resolution_energy: energy,
    resolution_weight: weight,
    detection_probability: probability,
    mean_measurements: moments?.mean ?? null,
    variance_measurements: moments?.variance ?? null,
    // Wald's identity on the bright part: On cumulative sums of random variables, Ann. Math. Stat. 15, 283 (1944), 10.1214/aoms/1177731235.
    mean_time: moments === null || moments.mean === null ? null : moments.mean * distribution.mean,
    ...within,
    sampled_winding: sampled?.mean ?? null,
    sampled_winding_error: sampled?.error ?? null,
    sampled_draws: sampling?.draws ?? null,
    sampled_seed: sampling?.seed ?? null,
    flags: [...notes.keys()],
    flag_reasons: [...notes.values()],
  };
}

/** The resolution in numbers: 'auto' is what the budget can show. */
export function usedResolution(
  { resolution, budget }: Pick<Question, 'resolution' | 'budget'>,
  { mean }: Pick<IntervalDistribution, 'mean'>,
): { readonly energy: number; readonly weight: number } {
  return {
    energy: resolution.energy === 'auto' ? 1 / (budget * mean) : resolution.energy,
    weight: resolution.weight === 'auto' ? 1 / budget : resolution.weight,
  };
}

/** P, or 0 where it is no more than the rounding of overlaps that vanish by symmetry. */
function visibleProbability({ measure }: MergedLevels): number {
  const probability = detectionProbability(measure);
  const n = measure.energies.length;
  return probability < n * (n * OVERLAP_ROUNDING) ** 2 ? 0 : probability;
}

/** The moments as far as double precision gives them. */
function resolvedMoments(
  levels: MergedLevels,
  moments: DetectionMoments | null,
  notes: Map<Flag, string>,
): { readonly mean: number | null; readonly variance: number | null } | null {
  if (moments === null) return null;
  const { measure, closest, phaseTolerance } = levels;
  const missing = (reason: string): void => void notes.set('underresolved', reason);
  const close = closest < CLOSEST_RATIO * phaseTolerance;
  const phases = `two phases differ by ${closest.toExponential(1)}, close to their uncertainty ${phaseTolerance.toExponential(1)}`;
  const least = measure.weights.reduce((smallest, weight) => Math.min(smallest, weight), 1);
  if (isReturn(measure)) {
    // The mean is a count of levels; only the variance feels how near they are and how weak.
    if (close) missing(`no variance: ${phases}`);
    else if (least < LEAST_WEIGHT) missing(`no variance: it is carried by a level of weight ${least.toExponential(1)}`);
    else return moments;
    return { mean: moments.mean, variance: null };
  }
  if (close) {
    missing(`no mean and variance: ${phases}`);
    return null;
  }
  // An amplitude error σ of level j enters the mean as about (2|a_j|σ + σ²)/v_j.
  const sigma = measure.energies.length * Number.EPSILON;
  const error = measure.weights.reduce((sum, v, j) => {
    const amplitude = Math.hypot(measure.overlapRe[j], measure.overlapIm?.[j] ?? 0) / Math.sqrt(v);
    return sum + (2 * amplitude * sigma + sigma * sigma) / v;
  }, 0);
  if (!(error < MEAN_ERROR * moments.mean * detectionProbability(measure))) {
    missing(`no mean and variance: they are carried by a level of weight ${least.toExponential(1)}, too weak for its overlap to be known`);
    return null;
  }
  return moments;
}
