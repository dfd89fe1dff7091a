/** Two intervals, the first with probability p: χ(x) = p exp(−i x τ₁) + (1 − p) exp(−i x τ₂). A lattice distribution: |χ| = 1 at 2π/|τ₁ − τ₂|. */
import { z } from 'zod';
import { nonNegativeTime } from './complement.js';
import { fixedInterval } from './fixed.js';
import type { ScheduleFamily } from './types.js';

export const twoPoint: ScheduleFamily<{ first: number; second: number; weight: number }> = {
  name: 'two-point',
  summary: 'one of two intervals, drawn anew each time',
  characteristic: 'p exp(−i x τ₁) + (1 − p) exp(−i x τ₂)',
  source: 'common practice',
  parameters: z
    .strictObject({
      first: nonNegativeTime('first interval τ₁, ≥ 0'),
      second: nonNegativeTime('second interval τ₂, ≥ 0'),
      weight: z.number().min(0).max(1).default(0.5).describe('probability p of the first interval, between 0 and 1'),
    })
    .refine(({ first, second, weight }) => weight * first + (1 - weight) * second > 0, {
      path: ['first'],
      error: 'intervals whose mean is > 0',
    }),
  build: ({ first, second, weight }) => {
    if (weight === 1 || first === second) return fixedInterval(first);
    if (weight === 0) return fixedInterval(second);
    return {
      random: true,
      mean: weight * first + (1 - weight) * second,
      variance: weight * (1 - weight) * (first - second) * (first - second),
      lattice: Math.abs(first - second),
      sample: (stream) => (stream.uniform() < weight ? first : second),
      complement(x, out) {
        const a = Math.sin((x * first) / 2);
        const b = Math.sin((x * second) / 2);
        out[0] = 2 * (weight * a * a + (1 - weight) * b * b);
        out[1] = weight * Math.sin(x * first) + (1 - weight) * Math.sin(x * second);
      },
    };
  },
};
