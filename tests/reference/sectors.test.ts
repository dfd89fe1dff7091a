/** Sectors of constrained models against published closed forms and counting sequences; lengths that take well under a second each. */
import { describe, expect, it } from 'vitest';
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

const census = (sites: number, levels: number, moves: readonly Move[], ring = false): SectorCensus =>
  partitionSectors(movingSpace(sites, levels, moves, ring)).census;

const range = (from: number, to: number): number[] => Array.from({ length: to - from + 1 }, (_, k) => from + k);

function binomial(n: number, k: number): number {
  let value = 1;
  for (let i = 1; i <= k; i += 1) value = (value * (n - k + i)) / i;
  return Math.round(value);
}

/** x_0, x_1, … of a linear recurrence. */
function sequence(first: readonly number[], next: (x: readonly number[], n: number) => number, length: number): number[] {
  const x = [...first];
  while (x.length < length) x.push(next(x, x.length));
  return x;
}

const fibonacci = sequence([0, 1], (x, n) => x[n - 1] + x[n - 2], 40);
const pell = sequence([0, 1], (x, n) => 2 * x[n - 1] + x[n - 2], 20);

/** Binary necklaces of length n. */
function necklaces(n: number): number {
  if (n === 0) return 1;
  const gcd = (a: number, b: number): number => (b === 0 ? a : gcd(b, a % b));
  return range(1, n).reduce((total, k) => total + 2 ** gcd(k, n), 0) / n;
}

describe('t–Jz chain', () => {
  // Statistical localization: from strong fragmentation to strong edge modes, Phys. Rev. B 101, 125126 (2020), 10.1103/PhysRevB.101.125126
  it.each(range(2, 11))('open, %i sites: one sector a spin pattern, C(L, N) configurations each', (sites) => {
    const { sizes, sector_count, frozen_states } = census(sites, 3, T_JZ);
    expect(sector_count).toBe(2 ** (sites + 1) - 1);
    expect(frozen_states).toBe(2 ** sites + 1);
    const counts = new Map<number, number>();
    for (let n = 0; n <= sites; n += 1) {
      const size = binomial(sites, n);
      counts.set(size, (counts.get(size) ?? 0) + 2 ** n);
    }
    expect(new Map(sizes.map(({ size, sectors }) => [size, sectors]))).toEqual(counts);
  });

  it.each(range(3, 10))('ring of %i sites: one sector a necklace of spins; derived by cyclic shifts of the pattern', (sites) => {
    const patterns = range(0, sites - 1).reduce((total, spins) => total + necklaces(spins), 0);
    expect(census(sites, 3, T_JZ, true).sector_count).toBe(patterns + 2 ** sites);
  });

  it('ring: largest sectors', () => {
    expect(range(3, 10).map((sites) => census(sites, 3, T_JZ, true).largest_sector)).toEqual([6, 12, 30, 60, 140, 280, 630, 1260]);
  });
});

describe('dipole-conserving spin one', () => {
  // Ergodicity breaking arising from Hilbert space fragmentation in dipole-conserving Hamiltonians, Phys. Rev. X 10, 011047 (2020),
  // 10.1103/PhysRevX.10.011047; counts: Statistical localization (as above) and enumeration of this project
  it.each(range(3, 10))('three-site term, open, %i sites: 2 P_{L+1} − 1 sectors, P the Pell numbers', (sites) => {
    const { sector_count, largest_sector } = census(sites, 3, DIPOLE_THREE);
    expect(sector_count).toBe(2 * pell[sites + 1] - 1);
    expect(largest_sector).toBe(binomial(sites - 1, Math.floor((sites - 1) / 2)));
  });

  it('three-site term, open: frozen states follow a(L) = 2a(L−1) + a(L−3)', () => {
    const frozen = sequence([1, 3, 9], (x, n) => 2 * x[n - 1] + x[n - 3], 12);
    for (const sites of range(3, 10)) expect(census(sites, 3, DIPOLE_THREE).frozen_states).toBe(frozen[sites]);
  });

  it('three-site term, ring', () => {
    const counts = range(3, 9).map((sites) => census(sites, 3, DIPOLE_THREE, true));
    expect(counts.map(({ sector_count }) => sector_count)).toEqual([17, 38, 88, 207, 491, 1172, 2811]);
    expect(counts.map(({ largest_sector }) => largest_sector)).toEqual([3, 6, 10, 20, 42, 80, 180]);
  });

  it('three- and four-site terms, open', () => {
    const counts = range(4, 10).map((sites) => census(sites, 3, [...DIPOLE_THREE, ...DIPOLE_FOUR]));
    expect(counts.map(({ sector_count }) => sector_count)).toEqual([49, 99, 193, 367, 689, 1291, 2417]);
    expect(counts.map(({ largest_sector }) => largest_sector)).toEqual([3, 7, 15, 33, 75, 174, 439]);
  });
});

describe('pair flip', () => {
  // The pair-flip model: a very entangled translationally invariant spin chain, arXiv:1805.07168; sequences A089022 and A035610 of the
  // On-Line Encyclopedia of Integer Sequences (closed walks on a regular tree)
  const sectors = (colours: number, sites: number): number =>
    range(1, sites)
      .filter((j) => (sites - j) % 2 === 0)
      .reduce((total, j) => total + colours * (colours - 1) ** (j - 1), sites % 2 === 0 ? 1 : 0);

  it.each([
    [2, 12],
    [3, 10],
    [4, 8],
  ])('%i colours: words without a pair, up to %i sites', (colours, most) => {
    for (const sites of range(2, most)) expect(census(sites, colours, pairFlip(colours)).sector_count).toBe(sectors(colours, sites));
  });

  it('largest sectors', () => {
    const largest = (colours: number, most: number): number[] =>
      range(2, most).map((sites) => census(sites, colours, pairFlip(colours)).largest_sector);
    expect(largest(3, 10)).toEqual([3, 5, 15, 29, 87, 181, 543, 1181, 3543]);
    expect(largest(4, 8)).toEqual([4, 7, 28, 58, 232, 523, 2092]);
    for (const half of range(1, 6)) expect(census(2 * half, 2, pairFlip(2)).largest_sector).toBe(binomial(2 * half, half));
  });
});

describe('spin-half chains with conserved strings', () => {
  it('pair hopping: words without 1100, open', () => {
    // Thermalization and its absence within Krylov subspaces of a constrained Hamiltonian, arXiv:1910.14048; sequence A008937
    const tribonacci = sequence([0, 0, 1], (x, n) => x[n - 1] + x[n - 2] + x[n - 3], 24);
    const partial = (sites: number): number => tribonacci.slice(0, sites + 3).reduce((a, b) => a + b, 0);
    for (const sites of range(4, 15)) {
      const found = census(sites, 2, PAIR_HOPPING);
      expect(found.sector_count).toBe(partial(sites));
      expect(found.largest_sector).toBe(binomial(Math.floor(sites / 2), Math.floor(sites / 4)));
    }
  });

  it('pair hopping on a ring', () => {
    expect(range(4, 12).map((sites) => census(sites, 2, PAIR_HOPPING, true).sector_count)).toEqual([
      14, 22, 44, 72, 140, 242, 458, 816, 1522,
    ]);
  });

  it('folded XXZ: 2(F_{L+2} − 1) sectors and 2(F_{L+1} + 1) frozen states, open', () => {
    // Hilbert-space fragmentation from strict confinement, Phys. Rev. Lett. 124, 207602 (2020), 10.1103/PhysRevLett.124.207602; Integrable
    // spin chain with Hilbert space fragmentation and solvable real-time dynamics, Phys. Rev. E 104, 044106 (2021), 10.1103/PhysRevE.104.044106
    for (const sites of range(4, 15)) {
      const found = census(sites, 2, FOLDED_XXZ);
      expect(found.sector_count).toBe(2 * (fibonacci[sites + 2] - 1));
      expect(found.frozen_states).toBe(2 * (fibonacci[sites + 1] + 1));
    }
    expect(range(4, 15).map((sites) => census(sites, 2, FOLDED_XXZ).largest_sector)).toEqual([
      2, 3, 4, 6, 10, 15, 21, 35, 56, 84, 126, 210,
    ]);
  });

  it('folded XXZ on a ring', () => {
    expect(range(4, 12).map((sites) => census(sites, 2, FOLDED_XXZ, true).sector_count)).toEqual([10, 16, 28, 38, 62, 88, 152, 224, 380]);
  });

  it('particle-conserving East: F_{L+3} − 1 sectors, largest from the Catalan triangle, open', () => {
    // Aspects of Hilbert space fragmentation in the quantum East model, arXiv:2409.15943 (growth); sequence A000071
    const found = range(3, 15).map((sites) => census(sites, 2, EAST_HOPPING));
    expect(found.map(({ sector_count }) => sector_count)).toEqual(range(3, 15).map((sites) => fibonacci[sites + 3] - 1));
    expect(found.map(({ largest_sector }) => largest_sector)).toEqual([2, 3, 5, 9, 14, 28, 48, 90, 165, 297, 572, 1001, 2002]);
  });

  it('East: sectors of 2^{L−1}, …, 2, 1 states and the frozen vacuum, open; a single one besides it on a ring', () => {
    for (const sites of range(2, 12)) {
      const expected = [...range(1, sites - 1).map((k) => ({ size: 2 ** (sites - k), sectors: 1 })), { size: 1, sectors: 2 }];
      expect(census(sites, 2, EAST).sizes).toEqual(expected);
    }
    expect(census(7, 2, EAST, true).sizes).toEqual([
      { size: 127, sectors: 1 },
      { size: 1, sectors: 1 },
    ]);
  });
});
