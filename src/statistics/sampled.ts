/**
 * Drawn schedules: one sequence of intervals gives one sequence of amplitudes f_1 … f_K, whose generating function
 * f̂(θ) = Σ f_n exp(i n θ) winds around the origin a whole number of times as θ goes once around. The number differs from draw to draw
 * (Randomly repeated measurements on quantum systems: correlations and topological invariants of the quantum evolution, J. Phys. A 54,
 * 395302 (2021)). Each draw has its own random stream, so that a draw is named by the seed and its number.
 */
import { randomStream, type RandomStream } from '../core/random.js';
import type { IntervalDistribution } from '../schedules/types.js';
import type { SpectralMeasure } from '../spectral/types.js';
import { fourier } from './fourier.js';
import { brightPart } from './levels.js';
import { amplitudeReduction, brightAmplitudes, measuredStep } from './stroboscopic.js';

export interface DrawnAmplitudes {
  /** f_n at index n = 0 … count; f_0 = 0. η|f_n|² is the probability that this draw's first click is the n-th measurement. */
  readonly re: Float64Array;
  readonly im: Float64Array;
}

/** Amplitudes f_n = φ†U(τ_n) K … K U(τ_1)ψ of one drawn sequence of intervals. */
export function drawAmplitudes(
  measure: SpectralMeasure,
  distribution: IntervalDistribution,
  count: number,
  stream: RandomStream,
  efficiency = 1,
): DrawnAmplitudes {
  const bright = brightPart(measure);
  const state = brightAmplitudes(bright);
  const reduction = amplitudeReduction(efficiency);
  const cos = new Float64Array(bright.energies.length);
  const sin = new Float64Array(bright.energies.length);
  const amplitude = new Float64Array(2);
  const re = new Float64Array(count + 1);
  const im = new Float64Array(count + 1);
  for (let n = 1; n <= count; n++) {
    const interval = distribution.sample(stream);
    for (let i = 0; i < cos.length; i++) {
      const phase = bright.energies[i] * interval;
      cos[i] = Math.cos(phase);
      sin[i] = Math.sin(phase);
    }
    measuredStep(state, cos, sin, reduction, amplitude);
    re[n] = amplitude[0];
    im[n] = amplitude[1];
  }
  return { re, im };
}

/** Grid points for each coefficient; between them the curve is followed further only where it turns fast. */
const OVERSAMPLING = 4;
const LARGEST_TURN = Math.PI / 3;
const DEEPEST = 24;

/**
 * Times that Σ_n f_n exp(i n θ) winds around the origin for θ from 0 to 2π; null where the curve passes through the origin within
 * rounding, so that the number is not defined. O(K log K).
 */
export function curveWinding(amplitudes: DrawnAmplitudes): number | null {
  const total = curvePhase(amplitudes).at(-1)!;
  return Number.isNaN(total) ? null : Math.round(total / (2 * Math.PI));
}

/**
 * Unwrapped phase of Σ_n f_n exp(i n θ) along the circle, relative to that at θ = 0: entry m is at θ = 2π m/(length − 1). NaN from where
 * the curve passes through the origin within rounding. O(K log K).
 */
export function curvePhase({ re, im }: DrawnAmplitudes): Float64Array {
  let size = 64;
  while (size < OVERSAMPLING * re.length) size *= 2;
  const gridRe = new Float64Array(size);
  const gridIm = new Float64Array(size);
  gridRe.set(re);
  gridIm.set(im);
  fourier(gridRe, gridIm);
  const turnBetween = (a: readonly [number, number], b: readonly [number, number]): number =>
    Math.atan2(b[1] * a[0] - b[0] * a[1], b[0] * a[0] + b[1] * a[1]);
  const follow = (from: number, a: readonly [number, number], to: number, b: readonly [number, number], depth: number): number => {
    const turn = turnBetween(a, b);
    if (Math.abs(turn) <= LARGEST_TURN) return turn;
    if (depth === 0) return NaN;
    const middle = (from + to) / 2;
    const c = evaluate(re, im, middle);
    return follow(from, a, middle, c, depth - 1) + follow(middle, c, to, b, depth - 1);
  };
  const phase = new Float64Array(size + 1);
  const step = (2 * Math.PI) / size;
  for (let m = 0; m < size; m++) {
    const next = (m + 1) % size;
    phase[m + 1] = phase[m] + follow(m * step, [gridRe[m], gridIm[m]], (m + 1) * step, [gridRe[next], gridIm[next]], DEEPEST);
  }
  return phase;
}

function evaluate(re: Float64Array, im: Float64Array, angle: number): readonly [number, number] {
  const cos = Math.cos(angle);
  const sin = Math.sin(angle);
  let a = 0;
  let b = 0;
  for (let n = re.length - 1; n >= 0; n--) {
    const next = a * cos - b * sin + re[n];
    b = a * sin + b * cos + im[n];
    a = next;
  }
  return [a, b];
}

export interface SampledWinding {
  /** mean over the draws whose winding number is defined; null where there is none */
  readonly mean: number | null;
  /** standard error of the mean; null below two draws */
  readonly error: number | null;
}

/** Winding numbers of `draws` schedules of `budget` intervals each. */
export function sampledWinding(
  measure: SpectralMeasure,
  distribution: IntervalDistribution,
  budget: number,
  sampling: { readonly draws: number; readonly seed: number },
  efficiency = 1,
): SampledWinding {
  const values: number[] = [];
  for (let draw = 0; draw < sampling.draws; draw++) {
    const winding = curveWinding(drawAmplitudes(measure, distribution, budget, randomStream(sampling.seed, 'schedule', draw), efficiency));
    if (winding !== null) values.push(winding);
  }
  if (values.length === 0) return { mean: null, error: null };
  const mean = values.reduce((sum, value) => sum + value, 0) / values.length;
  if (values.length === 1) return { mean, error: null };
  const squares = values.reduce((sum, value) => sum + (value - mean) * (value - mean), 0);
  return { mean, error: Math.sqrt(squares / (values.length - 1) / values.length) };
}
