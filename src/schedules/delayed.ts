/** A dead time d ≥ 0 added to every interval of a distribution: χ(x) → exp(−i x d) χ(x), the mean grows by d, the variance stays. */
import { rotateComplement } from './complement.js';
import { fixedInterval } from './fixed.js';
import type { IntervalDistribution } from './types.js';

export function delayed(distribution: IntervalDistribution, deadTime: number): IntervalDistribution {
  if (deadTime === 0) return distribution;
  if (!distribution.random) return fixedInterval(distribution.mean + deadTime);
  return {
    random: true,
    mean: distribution.mean + deadTime,
    variance: distribution.variance,
    lattice: distribution.lattice,
    sample: (stream) => deadTime + distribution.sample(stream),
    complement(x, out) {
      distribution.complement(x, out);
      rotateComplement(-x * deadTime, out);
    },
  };
}
