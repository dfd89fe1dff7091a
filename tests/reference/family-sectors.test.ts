/** Sectors of the model families: against the same models told by their moves, and closed forms of the blockade chain. */
import { describe, expect, it } from 'vitest';
import { findModel } from '../../src/models/registry.js';
import { partitionSectors, type SectorCensus } from '../../src/spectral/sectors.js';
import {
  DIPOLE_FOUR,
  DIPOLE_THREE,
  EAST,
  EAST_HOPPING,
  FOLDED_XXZ,
  type Move,
  movingSpace,
  PAIR_HOPPING,
  pairFlip,
  T_JZ,
} from '../support/constrained-moves.js';
import { type Asked, requestOf } from '../support/model-requests.js';

function census(model: string, asked: Asked, scope: 'conserved' | 'whole' = 'whole'): SectorCensus {
  return partitionSectors(findModel(model).productSpace!(requestOf(model, asked), scope)).census;
}

const MODELS: readonly [model: string, coupling: number, parameters: object, levels: number, moves: readonly Move[]][] = [
  ['t-jz-chain', 0.3, {}, 3, T_JZ],
  ['dipole-spin-one-chain', 0, {}, 3, DIPOLE_THREE],
  ['dipole-spin-one-chain', 0.4, {}, 3, [...DIPOLE_THREE, ...DIPOLE_FOUR]],
  ['pair-flip-chain', 0.7, { colours: 3 }, 3, pairFlip(3)],
  ['pair-flip-chain', 0.7, { colours: 4 }, 4, pairFlip(4)],
  ['pair-hopping-chain', 1, {}, 2, PAIR_HOPPING],
  ['folded-xxz-chain', 1, {}, 2, FOLDED_XXZ],
  ['east-hopping-chain', 1, {}, 2, EAST_HOPPING],
  ['quantum-east-chain', 0.5, {}, 2, EAST],
];

describe.each(['line', 'ring'])('on a %s', (geometry) => {
  it.each(MODELS)('%s at coupling %d, %o: the sectors of its moves', (model, coupling, parameters, levels, moves) => {
    for (const size of levels === 2 ? [5, 8, 9] : [5, 6]) {
      const asked = { size, coupling, parameters: { ...parameters, geometry }, prepared: { occupation: new Array(size).fill(0) } };
      expect(census(model, asked)).toEqual(partitionSectors(movingSpace(size, levels, moves, geometry === 'ring')).census);
    }
  });
});

describe('blockade chain', () => {
  // Weak ergodicity breaking from quantum many-body scars, Nat. Phys. 14, 745 (2018), 10.1038/s41567-018-0137-5 (from memory); sequences
  // A000045, A000032 and A005251 of the On-Line Encyclopedia of Integer Sequences
  const fibonacci = [0, 1];
  while (fibonacci.length < 24) fibonacci.push(fibonacci.at(-1)! + fibonacci.at(-2)!);
  const at = (size: number, geometry: string, space: string): SectorCensus =>
    census('pxp-chain', { size, coupling: 0, parameters: { geometry, space }, prepared: 'vacuum' });

  it('is one sector: F_{L+2} configurations on a line, a Lucas number on a ring', () => {
    for (let size = 3; size <= 16; size += 1) {
      expect(at(size, 'line', 'blockade')).toMatchObject({ sector_count: 1, dimension: fibonacci[size + 2] });
      expect(at(size, 'ring', 'blockade')).toMatchObject({ sector_count: 1, dimension: fibonacci[size - 1] + fibonacci[size + 1] });
    }
  });

  it('on all 2^L configurations: words without an isolated 1, or the recurrence on a ring', () => {
    const counts = (geometry: string, sizes: readonly number[]): number[] => sizes.map((size) => at(size, geometry, 'full').sector_count);
    expect(counts('line', [3, 4, 5, 6, 7, 8, 9, 10, 11, 12])).toEqual([4, 7, 12, 21, 37, 65, 114, 200, 351, 616]);
    const ring = counts('ring', [3, 4, 5, 6, 7, 8, 9, 10, 11, 12]);
    expect(ring.slice(0, 3)).toEqual([5, 10, 17]);
    for (let k = 3; k < ring.length; k += 1) expect(ring[k]).toBe(2 * ring[k - 1] - ring[k - 2] + ring[k - 3]);
    expect(at(10, 'line', 'full').largest_sector).toBe(fibonacci[12]);
  });
});
