/** The shortest linear recurrence of a sequence modulo a prime, by the Berlekamp–Massey algorithm (sources in modular-count.ts). */
import { inverse, multiply } from './modular-field.js';

/**
 * Terms in agreement after which the recurrence is taken as found. With a random functional every leading minor of the sequence's Hankel
 * matrix is nonzero except with a probability of order 1/p, and each of them would have to vanish.
 */
const AGREEING = 24;

/** polynomial −= factor·x^shift·other, in place; the two may have any degree that fits. */
function subtract(polynomial: Float64Array, factor: number, other: Float64Array, degree: number, shift: number, p: number): void {
  const negative = p - factor;
  for (let k = 0; k <= degree; k += 1) {
    const sum = polynomial[k + shift] + negative * other[k];
    polynomial[k + shift] = sum - Math.floor(sum / p) * p;
  }
}

/**
 * Degree of the minimal polynomial of a linearly recurrent sequence.
 * @param terms residues; as many are drawn as are needed, at most 2·limit
 * @param limit an upper bound of the degree
 */
export function minimalDegree(terms: Iterator<number>, limit: number, p: number): number {
  const seen = new Float64Array(2 * limit);
  const connection = new Float64Array(2 * limit + 2);
  let earlier = new Float64Array(2 * limit + 2);
  connection[0] = earlier[0] = 1;
  let degree = 0;
  let earlierDegree = 0;
  let earlierMiss = 1;
  let shift = 1;
  let agreeing = 0;
  for (let k = 0; k < 2 * limit && (agreeing < AGREEING || k < 2 * degree); k += 1) {
    seen[k] = terms.next().value as number;
    let miss = seen[k];
    for (let i = 1; i <= degree; i += 1) {
      miss += connection[i] * seen[k - i];
      miss -= Math.floor(miss / p) * p;
    }
    if (miss === 0) {
      shift += 1;
      agreeing += 1;
      continue;
    }
    agreeing = 0;
    const factor = multiply(miss, inverse(earlierMiss, p), p);
    if (2 * degree > k) {
      subtract(connection, factor, earlier, earlierDegree, shift, p);
      shift += 1;
      continue;
    }
    const before = connection.slice();
    subtract(connection, factor, earlier, earlierDegree, shift, p);
    earlier = before;
    [earlierDegree, degree] = [degree, k + 1 - degree];
    earlierMiss = miss;
    shift = 1;
  }
  return degree;
}
