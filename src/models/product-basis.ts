/**
 * Hamiltonians on a product basis, built sector by sector.
 *
 * A configuration holds one small integer a site (an occupation, a local level). In that basis H is a graph: configurations joined by
 * nonzero matrix elements. Breadth-first search from the configurations of φ visits its connected component(s) and nothing else, so the
 * cost follows the sector, never the full space. Rows are numbered in ascending lexicographic order of their configurations, the same
 * whatever state the search began from.
 *
 * Elements that are exactly zero are no edges: a chain with zero hopping falls apart into single configurations.
 */
import { WindrowError } from '../core/errors.js';
import { ConfigurationIndex } from './configuration-index.js';
import type { Sector } from './family-definition.js';
import { RowStore } from './row-store.js';
import type { Label } from './states.js';
import type { Emit, ProductBasis } from './types.js';

/** Breadth-first search; calls `finished` after each configuration and stops where it returns false. */
function search(
  basis: ProductBasis,
  seeds: readonly Label[],
  index: ConfigurationIndex,
  element: (number: number, re: number, im: number) => void,
  finished: () => boolean,
): void {
  const configuration = new Uint16Array(basis.sites);
  for (const seed of seeds) {
    configuration.set(seed);
    index.add(configuration);
  }
  const emit: Emit = (re, im = 0) => {
    if (re !== 0 || im !== 0) element(index.add(configuration), re, im);
  };
  for (let number = 0; number < index.count; number += 1) {
    index.read(number, configuration);
    element(number, basis.diagonal(configuration), 0);
    basis.connect(configuration, emit);
    if (!finished()) return;
  }
}

/**
 * H on the connected component(s) that hold the seeds.
 * @throws WindrowError point.too-large where the rows cannot be allocated
 */
export function exploreSector(basis: ProductBasis, seeds: readonly Label[]): Sector {
  const index = new ConfigurationIndex(basis.sites, basis.levels);
  const rows = new RowStore();
  try {
    search(
      basis,
      seeds,
      index,
      // The search reports a column of H; its conjugate is the row.
      (number, re, im) => rows.push(number, re, im === 0 ? 0 : -im),
      () => {
        rows.endRow();
        return true;
      },
    );
    const order = index.sorted();
    const rank = new Int32Array(index.count);
    order.forEach((number, row) => (rank[number] = row));
    const scratch = new Uint16Array(basis.sites);
    return {
      matrix: rows.matrix(order),
      indexOf(label) {
        scratch.set(label);
        const number = index.find(scratch);
        return number < 0 ? -1 : rank[number];
      },
      labelOf(row) {
        index.read(order[row], scratch);
        return [...scratch];
      },
    };
  } catch (cause) {
    if (!(cause instanceof RangeError)) throw cause;
    throw new WindrowError('point.too-large', 'the sector does not fit into memory', {
      found: `more than ${index.count} states`,
      allowed: 'what this machine can allocate',
      cause,
    });
  }
}

/**
 * Size of the sector and number of its matrix elements, without storing the matrix; null where it has more than `limit` states.
 */
export function measureSector(
  basis: ProductBasis,
  seeds: readonly Label[],
  limit: number,
): { readonly dimension: number; readonly nonzeros: number } | null {
  const index = new ConfigurationIndex(basis.sites, basis.levels);
  let nonzeros = 0;
  search(
    basis,
    seeds,
    index,
    () => (nonzeros += 1),
    () => index.count <= limit,
  );
  return index.count <= limit ? { dimension: index.count, nonzeros } : null;
}
