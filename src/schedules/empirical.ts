/**
 * Measured intervals: each of a list, repetitions counted, is drawn with equal probability. χ(x) is the sample mean of exp(−i x τ).
 * Cost: one evaluation of χ takes one sine pair for every distinct interval.
 */
import { z } from 'zod';
import { nonNegativeTime } from './complement.js';
import { fixedInterval } from './fixed.js';
import type { ScheduleFamily } from './types.js';

/** Relative to the range: readings this close are one value, and a lattice finer than this is none. */
const LATTICE_TOLERANCE = 1e-9;
const FINEST_LATTICE = 1e-6;

/** Greatest common spacing of ascending distinct values, by Euclid's algorithm; null where there is none. */
function commonSpacing(values: Float64Array): number | null {
  const range = values[values.length - 1] - values[0];
  let spacing = 0;
  for (let i = 1; i < values.length; i++) {
    let rest = spacing;
    spacing = values[i] - values[0];
    while (rest > LATTICE_TOLERANCE * range) {
      const next = Math.abs(spacing - rest * Math.round(spacing / rest));
      spacing = rest;
      rest = next;
    }
    if (spacing < FINEST_LATTICE * range) return null;
  }
  return spacing;
}

export const empirical: ScheduleFamily<{ intervals: number[] }> = {
  name: 'empirical',
  summary: 'measured intervals, each drawn with equal probability',
  characteristic: 'the mean of exp(−i x τ) over the list',
  source: 'common practice',
  parameters: z.strictObject({
    intervals: z
      .array(nonNegativeTime('a measured interval, ≥ 0'))
      .min(1)
      .max(100_000)
      .refine((list) => list.some((interval) => interval > 0), 'intervals whose mean is > 0')
      .describe('measured intervals, each ≥ 0, not all zero'),
  }),
  build: ({ intervals }) => {
    const sorted = Float64Array.from(intervals).sort();
    const values = Float64Array.from(new Set(sorted));
    if (values.length === 1) return fixedInterval(values[0]);
    const counts = new Map<number, number>();
    for (const interval of sorted) counts.set(interval, (counts.get(interval) ?? 0) + 1);
    const weights = values.map((value) => counts.get(value)! / sorted.length);
    const mean = values.reduce((sum, value, k) => sum + weights[k] * value, 0);
    return {
      random: true,
      mean,
      variance: values.reduce((sum, value, k) => sum + weights[k] * (value - mean) * (value - mean), 0),
      lattice: commonSpacing(values),
      sample: (stream) => sorted[Math.floor(stream.uniform() * sorted.length)],
      complement(x, out) {
        let re = 0;
        let im = 0;
        for (let k = 0; k < values.length; k++) {
          const half = Math.sin((x * values[k]) / 2);
          re += weights[k] * half * half;
          im += weights[k] * Math.sin(x * values[k]);
        }
        out[0] = 2 * re;
        out[1] = im;
      },
    };
  },
};
