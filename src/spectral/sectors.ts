/**
 * Krylov sectors of the classical basis: connected components of H's graph on a product basis, counted without a matrix.
 *
 * Configurations are numbered by their space and never stored; union–find keeps one 32-bit integer a configuration, so 10^7 of them take
 * 40 MB. The time is that of listing every matrix element once. A reported element that is exactly zero is no edge.
 */
import { WindrowError } from '../core/errors.js';
import type { Configuration, ProductSpace } from '../models/types.js';

/** How many sectors have a size. */
export interface SizeCount {
  readonly size: number;
  readonly sectors: number;
}

/** Field names are those of CSV and JSON. */
export interface SectorCensus {
  /** configurations of the space */
  readonly dimension: number;
  readonly sector_count: number;
  readonly largest_sector: number;
  /** largest_sector / dimension */
  readonly largest_sector_fraction: number;
  /** sectors of one configuration: eigenstates of H */
  readonly frozen_states: number;
  /** descending in size */
  readonly sizes: readonly SizeCount[];
}

export interface SectorPartition {
  readonly census: SectorCensus;
  /** Size of the sector that holds a configuration. @throws WindrowError state.invalid outside the space */
  sizeOf(configuration: ArrayLike<number>): number;
  /** Configurations in the sectors that hold any of these. @throws WindrowError state.invalid outside the space */
  unionSize(configurations: Iterable<ArrayLike<number>>): number;
}

const BYTES = 4;
const MOST = 2 ** 31 - 1;

/**
 * A forest over 0 … n − 1: a root holds minus the size of its tree, any other entry the number of an entry nearer the root.
 * Union by size with path halving, so a find takes a handful of steps at any n (common practice).
 */
class Forest {
  private readonly parent: Int32Array;

  constructor(size: number) {
    this.parent = new Int32Array(size).fill(-1);
  }

  root(entry: number): number {
    const { parent } = this;
    let at = entry;
    let above = parent[at];
    while (above >= 0) {
      const next = parent[above];
      if (next < 0) return above;
      parent[at] = next;
      at = next;
      above = parent[at];
    }
    return at;
  }

  join(a: number, b: number): void {
    const { parent } = this;
    let large = this.root(a);
    let small = this.root(b);
    if (large === small) return;
    if (parent[large] > parent[small]) [large, small] = [small, large];
    parent[large] += parent[small];
    parent[small] = large;
  }

  sizeAt(root: number): number {
    return -this.parent[root];
  }

  /** Number of trees of each size. */
  sizes(): Map<number, number> {
    const counts = new Map<number, number>();
    for (const entry of this.parent) if (entry < 0) counts.set(-entry, (counts.get(-entry) ?? 0) + 1);
    return counts;
  }
}

function checkMemory(dimension: number, memory: number): void {
  if (dimension <= MOST && dimension * BYTES <= memory) return;
  throw new WindrowError('point.too-large', 'the space has more configurations than fit into the memory limit', {
    found: `${dimension} configurations`,
    allowed: `${Math.min(MOST, Math.floor(memory / BYTES))} configurations at ${BYTES} bytes each`,
  });
}

/** Joins every pair of configurations that an element of H connects. */
function joinConnected({ basis, space }: ProductSpace, forest: Forest): void {
  const { sites, dimension } = space;
  const configuration: Configuration = new Uint16Array(sites);
  const own: Configuration = new Uint16Array(sites);
  let rank = 0;
  const emit = (re: number, im = 0): void => {
    if (re === 0 && im === 0) return;
    let site = 0;
    while (site < sites && configuration[site] === own[site]) site += 1;
    // Every edge is reported from both its ends; the lower one joins.
    if (site === sites || configuration[site] < own[site]) return;
    const target = space.rank(configuration);
    if (target < 0) {
      throw new WindrowError('internal.invariant', 'H leads out of its own space', {
        where: `from ${own.join(' ')}`,
        found: configuration.join(' '),
      });
    }
    forest.join(rank, target);
  };
  for (; rank < dimension; rank += 1) {
    space.read(rank, own);
    configuration.set(own);
    basis.connect(configuration, emit);
  }
}

function censusOf(dimension: number, forest: Forest): SectorCensus {
  const sizes = [...forest.sizes()].map(([size, sectors]) => ({ size, sectors })).sort((a, b) => b.size - a.size);
  const largest = sizes[0]?.size ?? 0;
  return {
    dimension,
    sector_count: sizes.reduce((total, { sectors }) => total + sectors, 0),
    largest_sector: largest,
    largest_sector_fraction: largest / dimension,
    frozen_states: sizes.find(({ size }) => size === 1)?.sectors ?? 0,
    sizes,
  };
}

/**
 * The sectors of a space.
 * @param memory bytes the union–find may use
 * @throws WindrowError point.too-large where 4 bytes a configuration are more than that, or the machine cannot allocate them
 */
export function partitionSectors(product: ProductSpace, memory = Infinity): SectorPartition {
  const { space } = product;
  checkMemory(space.dimension, memory);
  let forest: Forest;
  try {
    forest = new Forest(space.dimension);
  } catch (cause) {
    if (!(cause instanceof RangeError)) throw cause;
    throw new WindrowError('point.too-large', 'the configurations of the space cannot be numbered in the memory of this machine', {
      found: `${space.dimension} configurations`,
      cause,
    });
  }
  joinConnected(product, forest);
  const rootOf = (configuration: ArrayLike<number>): number => {
    const rank = space.rank(configuration);
    if (rank >= 0) return forest.root(rank);
    throw new WindrowError('state.invalid', 'a configuration that the space does not hold', {
      found: Array.from(configuration).join(' '),
      allowed: `${space.sites} values below ${space.levels} with the conserved numbers of the space`,
    });
  };
  return {
    census: censusOf(space.dimension, forest),
    sizeOf: (configuration) => forest.sizeAt(rootOf(configuration)),
    unionSize(configurations) {
      const roots = new Set<number>();
      for (const configuration of configurations) roots.add(rootOf(configuration));
      let total = 0;
      for (const root of roots) total += forest.sizeAt(root);
      return total;
    },
  };
}
