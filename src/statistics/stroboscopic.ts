/**
 * Monitored evolution under a fixed interval: b ← K U b in the bright eigenbasis, f_n = φ†U b, F_n = η|f_n|².
 *
 * The same amplitudes obey the renewal equation f_n = s_n − Σ_{m<n} f_m r_{n−m} (Quantum renewal equation for the first detection time
 * of a quantum walk, J. Phys. A 50, 04LT01 (2017), 10.1088/1751-8121/aa5191). The recursion is used instead: O(n) a step against O(k),
 * and a contraction, so that rounding does not build up; the equation serves as a check in the tests.
 */
import type { SpectralMeasure } from '../spectral/types.js';
import type { Detection } from './detection.js';

/** Prepared state in the bright eigenbasis, a_j = q_j/√v_j, and φ there, t_j = √v_j. */
export interface BrightAmplitudes {
  readonly target: Float64Array;
  readonly re: Float64Array;
  readonly im: Float64Array;
}

export function brightAmplitudes(measure: SpectralMeasure): BrightAmplitudes {
  const target = measure.weights.map(Math.sqrt);
  const scaled = (values: Float64Array | null): Float64Array =>
    values?.map((value, i) => value / target[i]) ?? new Float64Array(target.length);
  return { target, re: scaled(measure.overlapRe), im: scaled(measure.overlapIm) };
}

/** Moves a state by one unitary step and one measurement without a click. Returns φ†U b in `amplitude`. */
export function measuredStep(
  state: BrightAmplitudes,
  cos: Float64Array,
  sin: Float64Array,
  reduction: number,
  amplitude: Float64Array,
): void {
  const { target, re, im } = state;
  let fRe = 0;
  let fIm = 0;
  for (let i = 0; i < target.length; i++) {
    const a = re[i] * cos[i] + im[i] * sin[i];
    const b = im[i] * cos[i] - re[i] * sin[i];
    re[i] = a;
    im[i] = b;
    fRe += target[i] * a;
    fIm += target[i] * b;
  }
  for (let i = 0; i < target.length; i++) {
    re[i] -= reduction * target[i] * fRe;
    im[i] -= reduction * target[i] * fIm;
  }
  amplitude[0] = fRe;
  amplitude[1] = fIm;
}

/** κ = 1 − √(1−η), without cancellation at small η. */
export const amplitudeReduction = (efficiency: number): number => efficiency / (1 + Math.sqrt(1 - efficiency));

export function stroboscopicDetection(measure: SpectralMeasure, interval: number, efficiency: number): Detection {
  const state = brightAmplitudes(measure);
  const cos = measure.energies.map((energy) => Math.cos(energy * interval));
  const sin = measure.energies.map((energy) => Math.sin(energy * interval));
  const reduction = amplitudeReduction(efficiency);
  const amplitude = new Float64Array(2);
  return {
    step() {
      measuredStep(state, cos, sin, reduction, amplitude);
      return efficiency * (amplitude[0] * amplitude[0] + amplitude[1] * amplitude[1]);
    },
    remaining() {
      let sum = 0;
      for (let i = 0; i < state.re.length; i++) sum += state.re[i] * state.re[i] + state.im[i] * state.im[i];
      return sum;
    },
    close: () => undefined,
  };
}
