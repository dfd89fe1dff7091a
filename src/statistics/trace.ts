/**
 * The time series of one measure under one question: first detection, survival, averaged transition probability, the winding phase over
 * the circle, and time correlations. Pure. Arrays that run over measurements have index n = 0 … length; ħ = 1, times are in the inverse
 * of the energy unit.
 */
import { randomStream } from '../core/random.js';
import { buildSchedule } from '../schedules/registry.js';
import type { IntervalDistribution } from '../schedules/types.js';
import type { MeasuredPoint, SpectralMeasure } from '../spectral/types.js';
import { usedResolution } from './answer.js';
import { correlationMatrix, type CorrelationMatrix } from './correlation.js';
import { brightPart, isReturn, mergeResonant, phasesOf } from './levels.js';
import { detectionSeries } from './monitored.js';
import { curvePhase, drawAmplitudes } from './sampled.js';
import { transitionSeries } from './transition.js';
import type { Question } from './types.js';
import { recurrentWeight } from './unitary.js';
import { coverLevels } from './winding.js';

export interface TraceOptions {
  /** number of measurements followed */
  readonly length: number;
  /** rows of the correlation matrix */
  readonly correlations: number;
  /** the drawn sequence of intervals whose winding phase is given, where intervals are random */
  readonly draw: { readonly seed: number; readonly number: number };
}

export interface WindingPhase {
  /** 'exact': all n of a fixed interval and a perfect detector; 'budget': its first K; 'draw': the first K of one drawn sequence */
  readonly of: 'exact' | 'budget' | 'draw';
  /** θ from 0 to 2π, both included */
  readonly angle: Float64Array;
  /** arg f̂(θ), f̂(θ) = Σ f_n exp(i n θ), unwrapped and 0 at θ = 0; NaN past a zero on the circle */
  readonly phase: Float64Array;
  /** the last phase in units of 2π, a whole number; null where it is not defined */
  readonly winding: number | null;
}

export interface Trace {
  /** n<τ> */
  readonly time: Float64Array;
  /** F_n; F_0 = 0 */
  readonly detection: Float64Array;
  /** S_n; S_0 = 1 */
  readonly survival: Float64Array;
  /** <|u(t_n)|²> */
  readonly transition: Float64Array;
  /** the level that <|u(t_n)|²> moves around, at the resolution of the question */
  readonly recurrentWeight: number;
  readonly resolution: { readonly energy: number; readonly weight: number };
  readonly phase: WindingPhase;
  /** C_kl = <u(t_k) u(t_l)*>, k, l = 0 … size − 1 */
  readonly correlation: CorrelationMatrix;
}

/** @throws WindrowError schedule.unknown, schedule.parameter; statistics.undetectable where the detected state has no bright level */
export function traceMeasure(measured: MeasuredPoint, question: Question, { length, correlations, draw }: TraceOptions): Trace {
  const distribution = buildSchedule(question.schedule);
  const bright = brightPart(measured.measure);
  const resolution = usedResolution(question, distribution);
  return {
    time: Float64Array.from({ length: length + 1 }, (_, n) => n * distribution.mean),
    ...detectionSeries(bright, distribution, length, question.detector.efficiency),
    transition: transitionSeries(bright, distribution, length),
    recurrentWeight: recurrentWeight(bright, coverLevels(bright, distribution, resolution.energy)),
    resolution,
    phase: windingPhase(bright, distribution, question, draw),
    correlation: correlationMatrix(bright, distribution, correlations),
  };
}

/** Angles of the exact phase, besides 0; a level's turn is as narrow as its weight, so more would show little more. */
const ANGLES = 720;

function windingPhase(
  bright: SpectralMeasure,
  distribution: IntervalDistribution,
  { budget, detector: { efficiency } }: Question,
  { seed, number }: TraceOptions['draw'],
): WindingPhase {
  if (!distribution.random && efficiency === 1 && isReturn(bright)) return exactPhase(bright, distribution);
  const phase = curvePhase(drawAmplitudes(bright, distribution, budget, randomStream(seed, 'schedule', number), efficiency));
  const turns = phase.at(-1)! / (2 * Math.PI);
  return {
    of: distribution.random ? 'draw' : 'budget',
    angle: phase.map((_, m) => (2 * Math.PI * m) / (phase.length - 1)),
    phase,
    winding: Number.isNaN(turns) ? null : Math.round(turns),
  };
}

/**
 * The phase of f̂ = 1 − 1/r̂ on the circle, r̂(θ) = Σ v_j/(1 − exp(i(θ − φ_j))) = (1 + iC)/2 with φ_j = E_jτ and C(θ) = Σ v_j
 * cot((θ − φ_j)/2), so that f̂ = (iC − 1)/(iC + 1) and arg f̂ = π − 2 arctan C: it grows by 2π between two neighbouring phases φ_j,
 * and as often as there are distinct ones around the circle (Recurrence for discrete time unitary evolutions, Commun. Math. Phys. 320,
 * 543 (2013), 10.1007/s00220-012-1645-2). Phases that meet are one.
 */
function exactPhase(bright: SpectralMeasure, distribution: IntervalDistribution): WindingPhase {
  const { measure } = mergeResonant(bright, distribution);
  const poles = phasesOf(measure.energies, distribution.mean);
  const ascending = poles.slice().sort();
  const at = (angle: number): number => {
    const cotangents = poles.reduce((sum, pole, j) => sum + measure.weights[j] / Math.tan((angle - pole) / 2), 0);
    const passed = ascending.filter((pole) => pole > 0 && pole <= angle).length;
    return 2 * Math.PI * passed - 2 * Math.atan(cotangents);
  };
  const origin = at(0);
  const angle = Float64Array.from({ length: ANGLES + 1 }, (_, m) => (2 * Math.PI * m) / ANGLES);
  const phase = angle.map((theta) => at(theta) - origin);
  return { of: 'exact', angle, phase, winding: Math.round(phase[ANGLES] / (2 * Math.PI)) };
}
