/**
 * Inverse Gaussian intervals (first passage of a drifting Brownian motion), χ(x) = exp{(l/m)[1 − √(1 + 2 i m² x/l)]}.
 * Sampler: Generating random variates using transformations with multiple roots, Am. Stat. 30, 88 (1976),
 * 10.1080/00031305.1976.10479147 (from memory).
 */
import { z } from 'zod';
import { complementOfExponential, positiveTime } from './complement.js';
import type { ScheduleFamily } from './types.js';

export const inverseGaussian: ScheduleFamily<{ mean: number; shape: number }> = {
  name: 'inverse-gaussian',
  summary: 'inverse Gaussian intervals: first passage of a drifting Brownian motion',
  characteristic: 'exp{(l/m) [1 − √(1 + 2 i m² x/l)]}',
  source: 'common practice',
  parameters: z.strictObject({
    mean: positiveTime('mean interval m, > 0'),
    shape: positiveTime('shape l, a time > 0; the variance is m³/l'),
  }),
  build: ({ mean, shape }) => ({
    random: true,
    mean,
    variance: mean * mean * (mean / shape),
    lattice: null,
    sample(stream) {
      const normal = stream.normal();
      const y = (mean / shape) * normal * normal;
      // The smaller root of the quadratic, in the form that does not cancel; the larger one is m²/root.
      const root = mean / (1 + (y + Math.sqrt(y * (4 + y))) / 2);
      return stream.uniform() * (mean + root) <= mean ? root : mean * (mean / root);
    },
    complement(x, out) {
      // √(1 + i y) = p + i r; p − 1 = r²/(1 + p) keeps the digits at small y.
      const y = 2 * mean * x * (mean / shape);
      const p = Math.sqrt((1 + Math.hypot(1, y)) / 2);
      const r = y / (2 * p);
      const ratio = shape / mean;
      complementOfExponential((-ratio * r * r) / (1 + p), -ratio * r, out);
    },
  }),
};
