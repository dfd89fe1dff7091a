import { describe, expect, it } from 'vitest';
import fc from 'fast-check';
import type { ProductSpace } from '../../../src/models/types.js';
import { partitionSectors } from '../../../src/spectral/sectors.js';
import { movingSpace, T_JZ } from '../../support/constrained-moves.js';
import { overriding } from '../../support/overriding.js';

/** Numbers 0 … n − 1 as configurations of one site, joined as told. */
function graph(vertices: number, edges: readonly (readonly [number, number])[], element = 1): ProductSpace {
  return {
    space: {
      sites: 1,
      levels: vertices,
      dimension: vertices,
      rank: ({ 0: value }) => (value < vertices ? value : -1),
      read: (rank, out) => void (out[0] = rank),
    },
    basis: {
      sites: 1,
      levels: vertices,
      diagonal: () => 0,
      connect(c, emit) {
        const from = c[0];
        for (const [a, b] of edges) {
          if (a !== from && b !== from) continue;
          c[0] = a === from ? b : a;
          emit(element);
          c[0] = from;
        }
      },
    },
  };
}

/** Components by flooding with labels until nothing changes. */
function flooded(vertices: number, edges: readonly (readonly [number, number])[]): number[] {
  const label = Array.from({ length: vertices }, (_, k) => k);
  for (let changed = true; changed;) {
    changed = false;
    for (const [a, b] of edges) {
      const least = Math.min(label[a], label[b]);
      changed ||= label[a] !== least || label[b] !== least;
      label[a] = label[b] = least;
    }
  }
  return label;
}

describe('partitionSectors', () => {
  it('agrees with flooding on any graph', () => {
    const graphs = fc
      .integer({ min: 1, max: 30 })
      .chain((n) => fc.tuple(fc.constant(n), fc.array(fc.tuple(fc.nat(n - 1), fc.nat(n - 1)), { maxLength: 40 })));
    fc.assert(
      fc.property(graphs, ([vertices, edges]) => {
        const label = flooded(vertices, edges);
        const sectors = partitionSectors(graph(vertices, edges));
        const { census } = sectors;
        expect(census.sector_count).toBe(new Set(label).size);
        for (let v = 0; v < vertices; v += 1) expect(sectors.sizeOf([v])).toBe(label.filter((other) => other === label[v]).length);
        expect(census.sizes.reduce((total, { size, sectors }) => total + size * sectors, 0)).toBe(vertices);
        expect(census.largest_sector_fraction).toBe(census.largest_sector / vertices);
      }),
    );
  });

  it('takes elements that are zero for no edge', () => {
    expect(partitionSectors(graph(3, [[0, 1]], 0)).census.frozen_states).toBe(3);
  });

  it('adds the sectors of several configurations, each once', () => {
    const sectors = partitionSectors(movingSpace(4, 3, T_JZ));
    expect(
      sectors.unionSize([
        [1, 0, 0, 0],
        [0, 0, 0, 1],
        [2, 1, 0, 0],
      ]),
    ).toBe(4 + 6);
  });

  it('refuses a space that does not fit, and configurations outside', () => {
    const small = movingSpace(4, 3, T_JZ);
    expect(() => partitionSectors(small, 4 * 81 - 1)).toThrow(
      expect.objectContaining({
        code: 'point.too-large',
        details: { found: '81 configurations', allowed: '80 configurations at 4 bytes each' },
      }),
    );
    expect(() => partitionSectors(graph(3, [])).sizeOf([7])).toThrow(expect.objectContaining({ code: 'state.invalid' }));
  });

  it('notices a Hamiltonian that leaves its space', () => {
    const { space, basis } = graph(3, [[0, 2]]);
    const cut = { basis, space: overriding(space, { dimension: 2, rank: ({ 0: value }: ArrayLike<number>) => (value < 2 ? value : -1) }) };
    expect(() => partitionSectors(cut)).toThrow(expect.objectContaining({ code: 'internal.invariant' }));
  });
});
