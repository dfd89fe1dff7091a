/**
 * Normal intervals cut to τ ≥ 0: χ(x) = exp(−i μ x − s²x²/2) Φ(μ/s − i s x)/Φ(μ/s).
 *
 * Two evaluations share the work. Where x·(range of τ) is small, 1 − χ is a Gauss–Legendre sum of 1 − exp(−i x τ) over the density:
 * all terms of its real part are ≥ 0, so the digits of 1 − χ survive down to x → 0. Elsewhere the closed form is used, with the
 * Faddeeva function kept in the upper half plane, where it neither overflows nor cancels. Mean and variance come from the same sum,
 * which also holds where the cut lies far in the tail. Definition of Φ at complex argument: Digital Library of Mathematical
 * Functions, 7.2 and 7.18.
 */
import { z } from 'zod';
import type { RandomStream } from '../core/random.js';
import { complementOfExponential, LONGEST_TIME, positiveTime } from './complement.js';
import { faddeeva } from './faddeeva.js';
import { gaussLegendre } from './gauss-legendre.js';
import type { ScheduleFamily } from './types.js';

/** The density is followed down to exp(−45) of its largest value, 3e-20. */
const DEPTH = 90;
/** 64 nodes integrate the density times exp(−i x τ) to rounding while x·range stays below this. */
const QUADRATURE_PHASE = 8;

/** Standard normal variable given that it exceeds `bound`. */
function normalAbove(bound: number, stream: RandomStream): number {
  if (bound < 0.4) {
    for (;;) {
      const value = stream.normal();
      if (value >= bound) return value;
    }
  }
  // Exponential proposal: Simulation of truncated normal variables, Stat. Comput. 5, 121 (1995), 10.1007/BF00143942 (from memory).
  const rate = (bound + Math.sqrt(bound * bound + 4)) / 2;
  for (;;) {
    const value = bound - Math.log1p(-stream.uniform()) / rate;
    const distance = value - rate;
    if (Math.log(1 - stream.uniform()) <= (-distance * distance) / 2) return value;
  }
}

/** Nodes and normalised weights of the density on the part of [0, ∞) where it is not negligible. */
function discretise(location: number, scale: number) {
  const rule = gaussLegendre(64);
  const reach = Math.sqrt(DEPTH) * scale;
  const low = Math.max(0, location - reach);
  // Above a negative location the density falls like exp(−|μ|τ/s²), sooner than the Gaussian alone; the root in a form without cancellation.
  const high = location >= 0 ? location + reach : (reach * reach) / (Math.hypot(location, reach) - location);
  const times = rule.nodes.map((node) => low + ((high - low) * (node + 1)) / 2);
  const weights = times.map((time, k) => {
    const exponent = location >= 0 ? (time - location) ** 2 : time * (time - 2 * location);
    return rule.weights[k] * Math.exp(-exponent / (2 * scale * scale));
  });
  const total = weights.reduce((sum, weight) => sum + weight, 0);
  return { times, weights: weights.map((weight) => weight / total), range: high - low };
}

/** Closed form of 1 − χ, for x away from 0. */
function closedForm(location: number, scale: number): (x: number, out: Float64Array) => void {
  // χ = w(i(a + i b))/w(i a) with a = −μ/(s√2), b = s x/√2.
  const a = -location / (scale * Math.SQRT2);
  const value = new Float64Array(2);
  faddeeva(0, Math.abs(a), value);
  const atZero = value[0];
  if (a >= 0) {
    return (x, out) => {
      faddeeva((-scale * x) / Math.SQRT2, a, value);
      out[0] = (atZero - value[0]) / atZero;
      out[1] = -value[1] / atZero;
    };
  }
  // Reflected, w(z) = 2 exp(−z²) − w(−z), and scaled by exp(−a²)/2.
  const tail = Math.exp(-a * a) / 2;
  const probability = 1 - tail * atZero;
  return (x, out) => {
    const b = (scale * x) / Math.SQRT2;
    complementOfExponential(-b * b, -location * x, out);
    faddeeva(b, -a, value);
    out[0] = (out[0] - tail * (atZero - value[0])) / probability;
    out[1] = (out[1] + tail * value[1]) / probability;
  };
}

export const truncatedNormal: ScheduleFamily<{ location: number; scale: number }> = {
  name: 'truncated-normal',
  summary: 'normal intervals cut to τ ≥ 0; location 0 is the half normal',
  characteristic: 'exp(−i μ x − s²x²/2) Φ(μ/s − i s x)/Φ(μ/s)',
  source: 'common practice',
  parameters: z.strictObject({
    location: z.number().min(-LONGEST_TIME).max(LONGEST_TIME).describe('location μ of the normal before the cut, a time'),
    scale: positiveTime('scale s of the normal before the cut, > 0'),
  }),
  build: ({ location, scale }) => {
    const { times, weights, range } = discretise(location, scale);
    const mean = times.reduce((sum, time, k) => sum + weights[k] * time, 0);
    const direct = closedForm(location, scale);
    return {
      random: true,
      mean,
      variance: times.reduce((sum, time, k) => sum + weights[k] * (time - mean) * (time - mean), 0),
      lattice: null,
      sample: (stream) => Math.max(0, location + scale * normalAbove(-location / scale, stream)),
      complement(x, out) {
        if (Math.abs(x) * range > QUADRATURE_PHASE) {
          direct(x, out);
          return;
        }
        let re = 0;
        let im = 0;
        for (let k = 0; k < times.length; k++) {
          const half = Math.sin((x * times[k]) / 2);
          re += weights[k] * half * half;
          im += weights[k] * Math.sin(x * times[k]);
        }
        out[0] = 2 * re;
        out[1] = im;
      },
    };
  },
};
