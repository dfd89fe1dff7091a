/** Sectors of a product basis by brute force: every configuration is listed, every edge followed, components kept in a plain map. */
import { findModel } from '../../src/models/registry.js';
import { requestOf } from './model-requests.js';
import type { Asked } from './model-requests.js';

export interface BruteForceSectors {
  readonly dimension: number;
  /** Sizes of the components, largest first. */
  readonly sizes: readonly number[];
  /** The component that holds the detected state, among those of its conserved numbers. */
  readonly conserved: number;
}

export function bruteForceSectors(model: string, asked: Asked, scope: 'conserved' | 'whole' = 'whole'): BruteForceSectors {
  const family = findModel(model);
  const request = requestOf(model, asked);
  const { basis, space } = family.productSpace!(request, scope);
  const parent = Array.from({ length: space.dimension }, (_, i) => i);
  const root = (i: number): number => {
    let at = i;
    while (parent[at] !== at) at = parent[at] = parent[parent[at]];
    return at;
  };
  const configuration = new Uint16Array(space.sites);
  for (let rank = 0; rank < space.dimension; rank += 1) {
    space.read(rank, configuration);
    basis.connect(configuration, (re, im = 0) => {
      if (re === 0 && im === 0) return;
      const reached = space.rank(configuration);
      if (reached < 0) throw new Error(`${model} leaves its space at ${configuration.join('')}`);
      parent[root(rank)] = root(reached);
    });
  }
  const sizes = new Map<number, number>();
  for (let rank = 0; rank < space.dimension; rank += 1) sizes.set(root(rank), (sizes.get(root(rank)) ?? 0) + 1);
  return {
    dimension: space.dimension,
    sizes: [...sizes.values()].sort((a, b) => b - a),
    conserved: family.extent(request).hilbertDimension,
  };
}
