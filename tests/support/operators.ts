/** Operators of small chains as dense matrices, built from Kronecker products by ml-matrix: no basis search, no move tables. */
import { Matrix } from 'ml-matrix';
import { densePlanes } from './exact-spectrum.js';
import { findModel } from '../../src/models/registry.js';
import { requestOf } from './model-requests.js';
import type { Asked } from './model-requests.js';

/** A one-site operator on site x; row and column indices follow the lexicographic order of configurations. */
export function onSite(operator: Matrix, x: number, sites: number): Matrix {
  let whole = Matrix.eye(1);
  for (let y = 0; y < sites; y += 1) whole = whole.kroneckerProduct(y === x ? operator : Matrix.eye(operator.rows));
  return whole;
}

export const product = (...factors: readonly Matrix[]): Matrix => factors.reduce((left, right) => left.mmul(right));

export function sum(terms: readonly Matrix[]): Matrix {
  const total = Matrix.zeros(terms[0].rows, terms[0].columns);
  for (const term of terms) total.add(term);
  return total;
}

export const plusTranspose = (m: Matrix): Matrix => Matrix.add(m, m.transpose());
export const times = (factor: number, m: Matrix): Matrix => Matrix.mul(m, factor);

/** Spin operators in the order S^z ascending: S^z and S⁺ of a spin s = 1/2 or 1. */
export function spin(s: 0.5 | 1): { readonly z: Matrix; readonly plus: Matrix } {
  const levels = 2 * s + 1;
  const z = Matrix.diag(Array.from({ length: levels }, (_, k) => k - s));
  const plus = Matrix.zeros(levels, levels);
  for (let k = 0; k + 1 < levels; k += 1) {
    const m = k - s;
    plus.set(k + 1, k, Math.sqrt(s * (s + 1) - m * (m + 1)));
  }
  return { z, plus };
}

/** Annihilators c_x of fermions on a chain, with the signs of the order of the sites; value 1 is a fermion. */
export function fermions(sites: number): Matrix[] {
  const lower = new Matrix([
    [0, 1],
    [0, 0],
  ]);
  const parity = Matrix.diag([1, -1]);
  return Array.from({ length: sites }, (_, x) =>
    product(...Array.from({ length: x }, (__, y) => onSite(parity, y, sites)), onSite(lower, x, sites)),
  );
}

/** Largest difference between the elements of H that a family builds from the prepared state and those of `whole` on the same configurations. */
export function deviation(model: string, asked: Asked, whole: Matrix): number {
  const family = findModel(model);
  const request = requestOf(model, asked);
  const built = densePlanes(family.build(request).matrix).re;
  const { basis } = family.productSpace!(request, 'whole');
  const index = (c: ArrayLike<number>): number => Array.from(c).reduce((number, value) => number * basis.levels + value, 0);
  const seen = sectorOf(whole, index(startOf(model, asked)));
  if (seen.length !== built.rows) return Infinity;
  return Matrix.sub(whole.selection(seen, seen), built).abs().max();
}

function startOf(model: string, asked: Asked): readonly number[] {
  const state = findModel(model).canonical(requestOf(model, { ...asked, prepared: asked.prepared }));
  const written = state.prepared;
  if (typeof written === 'object' && 'occupation' in written) return written.occupation;
  throw new Error(`tests name their start by a configuration without a name, not ${JSON.stringify(written)}`);
}

/** Indices connected with the start by nonzero elements, ascending. */
function sectorOf(whole: Matrix, start: number): number[] {
  const seen = new Set([start]);
  for (const at of seen) for (let to = 0; to < whole.rows; to += 1) if (Math.abs(whole.get(to, at)) > 1e-14) seen.add(to);
  return [...seen].sort((a, b) => a - b);
}
