/**
 * 1 − χ(E_i − E_j) over the pairs i < j of a measure, row by row: row i holds j = i + 1 … n − 1. The pairs j < i follow by complex
 * conjugation, the diagonal is 0.
 *
 * With random intervals the rows are read again and again and are kept: n(n−1)/2 evaluations of the characteristic function, 8 n(n−1)
 * bytes, packed (0,1), (0,2), …, (0,n−1), (1,2), … With a fixed interval a row is a sine and a cosine for each element and is computed anew,
 * so that statistics of many levels need no n² memory.
 */
import type { IntervalDistribution } from '../schedules/types.js';
import type { SpectralMeasure } from '../spectral/types.js';

/** A strictly upper triangular complex matrix, given row by row. */
export interface Rows {
  /** Writes row i to re[j], im[j] for j > i; the rest of the two is left as it is. */
  fill(i: number, re: Float64Array, im: Float64Array): void;
}

export interface PairTable extends Rows {
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
  return {
    levels: n,
    re,
    im,
    fill(i, toRe, toIm) {
      const start = (i * (2 * n - i - 1)) / 2;
      toRe.set(re.subarray(start, start + n - 1 - i), i + 1);
      toIm.set(im.subarray(start, start + n - 1 - i), i + 1);
    },
  };
}

/** The same, computed row by row when asked for. */
export function pairRows(measure: SpectralMeasure, distribution: IntervalDistribution): Rows {
  const { energies } = measure;
  const out = new Float64Array(2);
  return {
    fill(i, re, im) {
      for (let j = i + 1; j < energies.length; j++) {
        distribution.complement(energies[i] - energies[j], out);
        re[j] = out[0];
        im[j] = out[1];
      }
    },
  };
}
