/** Exponential intervals: measurements of a Poisson process, χ(x) = 1/(1 + i x m). */
import { z } from 'zod';
import { positiveTime } from './complement.js';
import type { ScheduleFamily } from './types.js';

export const exponential: ScheduleFamily<{ mean: number }> = {
  name: 'exponential',
  summary: 'exponentially distributed intervals: measurements of a Poisson process',
  characteristic: '1/(1 + i x m)',
  source: 'common practice',
  parameters: z.strictObject({ mean: positiveTime('mean interval m, > 0') }),
  build: ({ mean }) => ({
    random: true,
    mean,
    variance: mean * mean,
    lattice: null,
    sample: (stream) => -mean * Math.log1p(-stream.uniform()),
    complement(x, out) {
      const y = x * mean;
      // i y/(1 + i y), divided by y where y² could overflow.
      if (Math.abs(y) > 1) {
        const inverse = 1 / y;
        const scale = 1 / (1 + inverse * inverse);
        out[0] = scale;
        out[1] = scale * inverse;
      } else {
        const scale = y / (1 + y * y);
        out[0] = scale * y;
        out[1] = scale;
      }
    },
  }),
};
