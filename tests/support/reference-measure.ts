/**
 * Spectral measures from closed forms and from a full decomposition (ml-matrix), independent of the project's own kernels.
 */
import { EigenvalueDecomposition, Matrix } from 'ml-matrix';
import type { MeasuredPoint, SpectralMeasure } from '../../src/spectral/types.js';

export type Complex = readonly [number, number];

/** Energies ascending; `overlap` undefined for the return problem. */
export function measureOf(levels: readonly { energy: number; weight: number; overlap?: number | Complex }[]): SpectralMeasure {
  const sorted = [...levels].sort((a, b) => a.energy - b.energy);
  const energies = Float64Array.from(sorted, (level) => level.energy);
  const weights = Float64Array.from(sorted, (level) => level.weight);
  if (levels.every((level) => level.overlap === undefined)) return { energies, weights, overlapRe: weights, overlapIm: null };
  const overlap = (part: 0 | 1): Float64Array =>
    Float64Array.from(
      sorted,
      (level) => (typeof level.overlap === 'number' ? [level.overlap, 0] : (level.overlap ?? [level.weight, 0]))[part],
    );
  return {
    energies,
    weights,
    overlapRe: overlap(0),
    overlapIm: sorted.some((level) => typeof level.overlap === 'object') ? overlap(1) : null,
  };
}

/** H = −g σx: prepared and detected up, or prepared down. */
export const twoLevel = (g: number, transition = false): SpectralMeasure =>
  measureOf([-1, 1].map((sign) => ({ energy: sign * g, weight: 0.5, ...(transition ? { overlap: -sign / 2 } : {}) })));

/** Ring of `sites` sites, H = −g Σ(e^{i·phase}|x+1><x| + h.c.), prepared `distance` sites before the detected site. */
export function ring(sites: number, distance = 0, g = 1, phase = 0): SpectralMeasure {
  const levels: { energy: number; weight: number; overlap: [number, number] }[] = [];
  for (let k = 0; k < sites; k++) {
    const energy = -2 * g * Math.cos((2 * Math.PI * k) / sites - phase);
    const angle = (2 * Math.PI * k * distance) / sites;
    const same = levels.find((level) => Math.abs(level.energy - energy) < 1e-9 * g);
    if (same === undefined) levels.push({ energy, weight: 1 / sites, overlap: [Math.cos(angle) / sites, Math.sin(angle) / sites] });
    else {
      same.weight += 1 / sites;
      same.overlap[0] += Math.cos(angle) / sites;
      same.overlap[1] += Math.sin(angle) / sites;
    }
  }
  if (distance === 0) return measureOf(levels.map(({ energy, weight }) => ({ energy, weight })));
  const real = levels.every((level) => Math.abs(level.overlap[1]) < 1e-12);
  return measureOf(levels.map(({ energy, weight, overlap }) => ({ energy, weight, overlap: real ? overlap[0] : overlap })));
}

/** Middle site of a path of 2·half + 1 sites: the infinite line until the front returns after a time of about half/g. */
export function pathMiddle(half: number, g = 1): SpectralMeasure {
  const sites = 2 * half + 1;
  const odd = Array.from({ length: half + 1 }, (_, i) => 2 * i + 1);
  return measureOf(odd.map((k) => ({ energy: -2 * g * Math.cos((Math.PI * k) / (sites + 1)), weight: 2 / (sites + 1) })));
}

export interface DenseProblem {
  /** row-major n × n Hermitian */
  readonly re: readonly number[][];
  readonly im: readonly number[][];
  readonly detected: readonly Complex[];
  readonly prepared: readonly Complex[];
}

/** Full decomposition of the real 2n × 2n form [[A, −B], [B, A]] of H = A + iB; eigenvalues closer than `tolerance` are one level. */
export function decompose({ re, im, detected, prepared }: DenseProblem, tolerance = 1e-10): SpectralMeasure {
  const n = re.length;
  const big = Matrix.zeros(2 * n, 2 * n);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) {
      big.set(i, j, re[i][j]);
      big.set(n + i, n + j, re[i][j]);
      big.set(i, n + j, -im[i][j]);
      big.set(n + i, j, im[i][j]);
    }
  }
  const { realEigenvalues, eigenvectorMatrix } = new EigenvalueDecomposition(big, { assumeSymmetric: true });
  const order = realEigenvalues.map((_, k) => k).sort((a, b) => realEigenvalues[a] - realEigenvalues[b]);
  const levels: { energy: number; weight: number; overlap: [number, number] }[] = [];
  // The projector on an eigenspace of the real form is that of H: <φ|P|ψ> = Σ (φ·x)(x·ψ) with complex φ, ψ read as real vectors.
  const along = (state: readonly Complex[], k: number): number =>
    state.reduce((sum, [a, b], i) => sum + a * eigenvectorMatrix.get(i, k) + b * eigenvectorMatrix.get(n + i, k), 0);
  const turned = (state: readonly Complex[]): readonly Complex[] => state.map(([a, b]) => [-b, a]);
  for (const k of order) {
    const energy = realEigenvalues[k];
    let level = levels[levels.length - 1];
    if (level === undefined || energy - level.energy > tolerance) levels.push((level = { energy, weight: 0, overlap: [0, 0] }));
    level.weight += along(detected, k) ** 2;
    level.overlap[0] += along(detected, k) * along(prepared, k);
    level.overlap[1] += along(turned(detected), k) * along(prepared, k);
  }
  const bright = levels.filter((level) => level.weight > 1e-20);
  return detected === prepared ? measureOf(bright.map(({ energy, weight }) => ({ energy, weight }))) : measureOf(bright);
}

/** A measured point around a measure, for answer(). */
export function pointOf(measure: SpectralMeasure): MeasuredPoint {
  const sum = (values: Float64Array | null): number => values?.reduce((total, value) => total + value, 0) ?? 0;
  const n = measure.energies.length;
  return {
    measure,
    overlap: measure.overlapRe === measure.weights ? [1, 0] : [sum(measure.overlapRe), sum(measure.overlapIm)],
    fields: {
      hilbert_dimension: n,
      sector_dimension: n,
      accessible_dimension: n,
      accessible_by: 'weights',
      bright_levels: n,
      effective_dimension: n,
      mean_energy: 0,
      energy_variance: 0,
      smallest_gap: null,
      gap_ratio: null,
      measure_residual: 0,
      method: 'reference',
      flags: [],
      flag_reasons: [],
    },
  };
}
