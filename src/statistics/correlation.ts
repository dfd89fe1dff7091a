/**
 * Time correlations of the averaged evolution, k ≥ l: C_kl = <u(t_k) u(t_l)*> = Σ_ij q_i q_j* χ(E_i − E_j)^l χ(E_i)^(k−l), and
 * C_lk = C_kl*. t_k = τ_1 + … + τ_k, t_0 = 0; the zero of energy is that of the measure. (Randomly repeated measurements on quantum
 * systems: correlations and topological invariants of the quantum evolution, J. Phys. A 54, 395302 (2021).)
 */
import type { IntervalDistribution } from '../schedules/types.js';
import type { SpectralMeasure } from '../spectral/types.js';
import { pairComplements } from './pairs.js';

export interface CorrelationMatrix {
  /** number of rows; indices k, l = 0 … size − 1 */
  readonly size: number;
  /** row-major C_kl */
  readonly re: Float64Array;
  readonly im: Float64Array;
}

/** O(size·n² + size²·n) operations. */
export function correlationMatrix(measure: SpectralMeasure, distribution: IntervalDistribution, size: number): CorrelationMatrix {
  const { energies, overlapRe } = measure;
  const n = energies.length;
  const overlapIm = measure.overlapIm ?? new Float64Array(n);
  const pairs = pairComplements(measure, distribution);
  const powerRe = new Float64Array(pairs.re.length).fill(1);
  const powerIm = new Float64Array(pairs.re.length);
  const own = energies.map(() => 0);
  const ownIm = new Float64Array(n);
  const out = new Float64Array(2);
  for (let i = 0; i < n; i++) {
    distribution.complement(energies[i], out);
    own[i] = 1 - out[0];
    ownIm[i] = -out[1];
  }
  const re = new Float64Array(size * size);
  const im = new Float64Array(size * size);
  for (let l = 0; l < size; l++) {
    // g_i = q_i Σ_j q_j* χ(E_i − E_j)^l, then advanced by χ(E_i) for every k > l.
    const gRe = overlapRe.slice();
    const gIm = overlapIm.slice();
    const sumRe = overlapRe.slice();
    const sumIm = overlapIm.map((value) => -value);
    for (let i = 0, p = 0; i < n; i++) {
      for (let j = i + 1; j < n; j++, p++) {
        const a = powerRe[p];
        const b = powerIm[p];
        sumRe[i] += a * overlapRe[j] + b * overlapIm[j];
        sumIm[i] += b * overlapRe[j] - a * overlapIm[j];
        sumRe[j] += a * overlapRe[i] - b * overlapIm[i];
        sumIm[j] += -b * overlapRe[i] - a * overlapIm[i];
        powerRe[p] = a * (1 - pairs.re[p]) + b * pairs.im[p];
        powerIm[p] = b * (1 - pairs.re[p]) - a * pairs.im[p];
      }
    }
    for (let i = 0; i < n; i++) multiply(gRe, gIm, i, sumRe[i], sumIm[i]);
    for (let k = l; k < size; k++) {
      let totalRe = 0;
      let totalIm = 0;
      for (let i = 0; i < n; i++) {
        totalRe += gRe[i];
        totalIm += gIm[i];
        multiply(gRe, gIm, i, own[i], ownIm[i]);
      }
      re[k * size + l] = totalRe;
      im[k * size + l] = k === l ? 0 : totalIm;
      re[l * size + k] = totalRe;
      im[l * size + k] = k === l ? 0 : -totalIm;
    }
  }
  return { size, re, im };
}

function multiply(re: Float64Array, im: Float64Array, i: number, byRe: number, byIm: number): void {
  const a = re[i] * byRe - im[i] * byIm;
  im[i] = re[i] * byIm + im[i] * byRe;
  re[i] = a;
}
