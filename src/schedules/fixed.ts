/** Fixed interval: a stroboscopic measurement, χ(x) = exp(−i x τ). */
import { z } from 'zod';
import { complementOfExponential, positiveTime } from './complement.js';
import type { IntervalDistribution, ScheduleFamily } from './types.js';

/** The distribution that always gives `interval`; every family falls back on it where its variance is zero. */
export function fixedInterval(interval: number): IntervalDistribution {
  return {
    random: false,
    mean: interval,
    variance: 0,
    lattice: interval,
    sample: () => interval,
    complement: (x, out) => complementOfExponential(0, -x * interval, out),
  };
}

export const fixed: ScheduleFamily<{ interval: number }> = {
  name: 'fixed',
  summary: 'one fixed interval: stroboscopic measurement',
  characteristic: 'exp(−i x τ)',
  source: 'common practice',
  parameters: z.strictObject({ interval: positiveTime('interval τ between measurements, > 0') }),
  build: ({ interval }) => fixedInterval(interval),
};
