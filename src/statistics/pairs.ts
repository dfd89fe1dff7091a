/**
 * 1 − χ(E_i − E_j) over the pairs i < j of a measure, packed row by row: (0,1), (0,2), …, (0,n−1), (1,2), … The pairs j > i follow by
 * complex conjugation, the diagonal is 0. n(n−1)/2 evaluations of the characteristic function; 8 n(n−1) bytes.
 */
import type { IntervalDistribution } from '../schedules/types.js';
import type { SpectralMeasure } from '../spectral/types.js';

export interface PairTable {
  readonly levels: number;
  readonly re: Float64Array;
  readonly im: Float64Array;
}

export function pairComplements(measure: SpectralMeasure, distribution: IntervalDistribution): PairTable {
  const { energies } = measure;
  const n = energies.length;
  const re = new Float64Array((n * (n - 1)) / 2);
  const im = new Float64Array(re.length);
  const out = new Float64Array(2);
  for (let i = 0, p = 0; i < n; i++) {
    for (let j = i + 1; j < n; j++, p++) {
      distribution.complement(energies[i] - energies[j], out);
      re[p] = out[0];
      im[p] = out[1];
    }
  }
  return { levels: n, re, im };
}
