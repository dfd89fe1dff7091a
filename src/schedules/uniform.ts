/** Uniform intervals on [low, high], χ(x) = exp(−i x (a+b)/2) sin(x(b−a)/2)/(x(b−a)/2). */
import { z } from 'zod';
import { nonNegativeTime, positiveTime } from './complement.js';
import type { ScheduleFamily } from './types.js';

/** 1 − sin(u)/u; its Taylor series where the difference would cancel. */
function sincComplement(u: number): number {
  if (Math.abs(u) > 1) return 1 - Math.sin(u) / u;
  const square = u * u;
  let term = square / 6;
  let sum = 0;
  for (let k = 2; Math.abs(term) > 1e-17 * Math.abs(sum) && k < 20; k++) {
    sum += term;
    term *= -square / (2 * k * (2 * k + 1));
  }
  return sum;
}

export const uniform: ScheduleFamily<{ low: number; high: number }> = {
  name: 'uniform',
  summary: 'intervals uniform between two values',
  characteristic: 'exp(−i x (a+b)/2) sin(x(b−a)/2)/(x(b−a)/2)',
  source: 'common practice',
  parameters: z
    .strictObject({
      low: nonNegativeTime('shortest interval a, ≥ 0'),
      high: positiveTime('longest interval b, > low'),
    })
    .refine(({ low, high }) => low < high, { path: ['high'], error: 'a number > low' }),
  build: ({ low, high }) => {
    const centre = low + (high - low) / 2;
    return {
      random: true,
      mean: centre,
      variance: ((high - low) * (high - low)) / 12,
      lattice: null,
      sample: (stream) => low + (high - low) * stream.uniform(),
      complement(x, out) {
        const lost = sincComplement((x * (high - low)) / 2);
        const sinc = 1 - lost;
        const half = Math.sin((x * centre) / 2);
        out[0] = lost + 2 * sinc * half * half;
        out[1] = sinc * Math.sin(x * centre);
      },
    };
  },
};
