/**
 * Gamma-distributed intervals, χ(x) = (1 + i x m/s)^(−s). Shape 1 is exponential, a whole shape the Erlang law, a large one nearly fixed.
 * Sampler: A simple method for generating gamma variables, ACM Trans. Math. Softw. 26, 363 (2000), 10.1145/358407.358414 (from memory).
 */
import { z } from 'zod';
import type { RandomStream } from '../core/random.js';
import { complementOfExponential, positiveTime } from './complement.js';
import type { ScheduleFamily } from './types.js';

/** A gamma variable of unit scale. */
function standardGamma(shape: number, stream: RandomStream): number {
  // Below shape 1 the variable is one of shape + 1 times U^(1/shape).
  const boost = shape < 1 ? Math.pow(1 - stream.uniform(), 1 / shape) : 1;
  const d = (shape < 1 ? shape + 1 : shape) - 1 / 3;
  const c = 1 / Math.sqrt(9 * d);
  for (;;) {
    const normal = stream.normal();
    const root = 1 + c * normal;
    if (root <= 0) continue;
    const cube = root * root * root;
    const log = Math.log(1 - stream.uniform());
    if (log < 0.5 * normal * normal + d * (1 - cube + Math.log(cube))) return boost * d * cube;
  }
}

export const gamma: ScheduleFamily<{ mean: number; shape: number }> = {
  name: 'gamma',
  summary: 'gamma-distributed intervals; a whole shape is the Erlang law, shape 1 the exponential',
  characteristic: '(1 + i x m/s)^(−s)',
  source: 'common practice',
  parameters: z.strictObject({
    mean: positiveTime('mean interval m, > 0'),
    shape: z.number().min(1e-6).max(1e9).describe('shape s, between 1e-6 and 1e9; the variance is m²/s'),
  }),
  build: ({ mean, shape }) => ({
    random: true,
    mean,
    variance: (mean * mean) / shape,
    lattice: null,
    sample: (stream) => (mean / shape) * standardGamma(shape, stream),
    complement(x, out) {
      const y = (x * mean) / shape;
      const logModulus = Math.abs(y) < 1e100 ? 0.5 * Math.log1p(y * y) : Math.log(Math.abs(y));
      complementOfExponential(-shape * logModulus, -shape * Math.atan(y), out);
    },
  }),
};
