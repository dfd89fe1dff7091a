/** Sectors of constrained chains: published counts and closed forms. The search of the sectors is the test's own. */
import { describe, expect, it } from 'vitest';
import { bruteForceSectors } from '../support/brute-force-sectors.js';
import type { Asked } from '../support/model-requests.js';

const fibonacci = (n: number): number => (n < 2 ? n : fibonacci(n - 1) + fibonacci(n - 2));

interface Table {
  readonly sectors?: readonly number[];
  readonly largest?: readonly number[];
  readonly frozen?: readonly number[];
  readonly spaces?: readonly number[];
}

function expectTable(model: string, first: number, asked: Omit<Asked, 'size'>, table: Table): void {
  const length = Math.max(...Object.values(table).map((list: readonly number[]) => list.length));
  const found = Array.from({ length }, (_, k) => bruteForceSectors(model, { ...asked, size: first + k }));
  const agree = (expected: readonly number[] | undefined, of: (sectors: (typeof found)[number]) => number): void => {
    if (expected !== undefined) expect(found.slice(0, expected.length).map(of)).toEqual(expected);
  };
  agree(table.sectors, ({ sizes }) => sizes.length);
  agree(table.largest, ({ sizes }) => sizes[0]);
  agree(table.frozen, ({ sizes }) => sizes.filter((size) => size === 1).length);
  agree(table.spaces, ({ dimension }) => dimension);
}

const line = { geometry: 'line' };
const ring = { geometry: 'ring' };

describe('blockade-constrained flips', () => {
  // Weak ergodicity breaking from quantum many-body scars, Nat. Phys. 14, 745 (2018), DOI 10.1038/s41567-018-0137-5 (from memory);
  // Fibonacci (OEIS A000045) and Lucas numbers (A000032).
  it('line: one sector of F_{L+2} configurations', () => {
    const spaces = Array.from({ length: 13 }, (_, k) => fibonacci(k + 4));
    expect(spaces.slice(0, 5)).toEqual([3, 5, 8, 13, 21]);
    expectTable('pxp-chain', 2, { parameters: line, prepared: 'vacuum' }, { spaces, largest: spaces, sectors: spaces.map(() => 1) });
  });

  it('ring: one sector of F_{L−1} + F_{L+1} configurations', () => {
    const spaces = [3, 4, 7, 11, 18, 29, 47, 76, 123, 199, 322, 521];
    expectTable('pxp-chain', 2, { parameters: ring, prepared: 'vacuum' }, { spaces, largest: spaces, sectors: spaces.map(() => 1) });
  });

  it('line, all 2^L configurations: words without an isolated 1 (OEIS A005251)', () => {
    const sectors = [2, 4, 7, 12, 21, 37, 65, 114, 200, 351, 616];
    expectTable('pxp-chain', 2, { parameters: { ...line, space: 'full' }, prepared: 'vacuum' }, { sectors });
  });

  it('ring, all 2^L configurations: a(n) = 2a(n−1) − a(n−2) + a(n−3)', () => {
    const sectors = [5, 10, 17, 29, 51, 90, 158, 277, 486, 853];
    expectTable('pxp-chain', 3, { parameters: { ...ring, space: 'full' }, prepared: 'vacuum' }, { sectors });
  });
});

describe('t–Jz', () => {
  // Statistical localization: from strong fragmentation to strong edge modes, Phys. Rev. B 101, 125126 (2020), DOI 10.1103/PhysRevB.101.125126
  it('line: 2^(L+1) − 1 sectors, those of N spins of C(L, N) states, 2^L + 1 frozen', () => {
    const sizes = [2, 3, 4, 5, 6, 7, 8];
    expectTable(
      't-jz-chain',
      2,
      { parameters: line, prepared: 'empty' },
      { sectors: sizes.map((L) => 2 ** (L + 1) - 1), frozen: sizes.map((L) => 2 ** L + 1), largest: [2, 3, 6, 10, 20, 35, 70] },
    );
  });

  it('ring: necklaces of spins', () => {
    expectTable(
      't-jz-chain',
      3,
      { parameters: ring, prepared: 'empty' },
      { sectors: [14, 26, 48, 88, 166, 314], largest: [6, 12, 30, 60, 140, 280] },
    );
  });
});

describe('dipole-conserving spin one', () => {
  // Ergodicity breaking arising from Hilbert space fragmentation in dipole-conserving Hamiltonians, Phys. Rev. X 10, 011047 (2020),
  // DOI 10.1103/PhysRevX.10.011047: exponentially many sectors; 2 P_{L+1} − 1 with the Pell numbers (OEIS A000129).
  it('three sites, line: 2 P_{L+1} − 1 sectors, the largest of C(L − 1, ⌊(L − 1)/2⌋)', () => {
    expectTable(
      'dipole-spin-one-chain',
      3,
      { parameters: line, coupling: 0, prepared: 'all-zero' },
      { sectors: [23, 57, 139, 337, 815, 1969], largest: [2, 3, 6, 10, 20, 35], frozen: [19, 41, 91, 201, 443, 977] },
    );
  });

  it('three sites, ring', () => {
    expectTable(
      'dipole-spin-one-chain',
      3,
      { parameters: ring, coupling: 0, prepared: 'all-zero' },
      { sectors: [17, 38, 88, 207, 491, 1172], largest: [3, 6, 10, 20, 42, 80] },
    );
  });

  it('three and four sites, line: weakly fragmented', () => {
    expectTable(
      'dipole-spin-one-chain',
      4,
      { parameters: line, coupling: 1, prepared: 'all-zero' },
      { sectors: [49, 99, 193, 367, 689], largest: [3, 7, 15, 33, 75] },
    );
  });

  it.each([
    [5, '0+-+0', 6, 7],
    [7, '0+-+-+0', 20, 31],
  ])('%d sites: the largest sector, %s with %d states, lies in a symmetry sector of %d', (size, product, sector, symmetric) => {
    const asked = { size, parameters: line, coupling: 0, prepared: { product } };
    const { sizes, dimension, conserved } = bruteForceSectors('dipole-spin-one-chain', asked, 'conserved');
    expect(sizes[0]).toBe(sector);
    expect(dimension).toBe(symmetric);
    expect(conserved).toBe(symmetric);
  });
});

describe('pair flips of m colours', () => {
  // The pair-flip model: a very entangled translationally invariant spin chain, arXiv:1805.07168; closed walks on trees (OEIS A089022, A035610).
  const sectorsOf = (m: number, L: number): number => {
    let sum = L % 2 === 0 ? 1 : 0;
    for (let j = L; j >= 1; j -= 2) sum += m * (m - 1) ** (j - 1);
    return sum;
  };
  it.each([
    [2, 9, [2, 3, 6, 10, 20, 35, 70, 126]],
    [3, 8, [3, 5, 15, 29, 87, 181, 543]],
    [4, 7, [4, 7, 28, 58, 232, 523]],
  ])('m = %d, line up to %d sites', (colours, most, largest) => {
    const sectors = Array.from({ length: most - 1 }, (_, k) => sectorsOf(colours, k + 2));
    expectTable('pair-flip-chain', 2, { parameters: { ...line, colours }, prepared: 'one-colour' }, { sectors, largest });
  });
});

describe('pair hopping 1001 <-> 0110', () => {
  // Thermalization and its absence within Krylov subspaces of a constrained Hamiltonian, arXiv:1910.14048; OEIS A008937(L + 1).
  it('line', () => {
    expectTable(
      'pair-hopping-chain',
      4,
      { parameters: line, prepared: 'neel' },
      { sectors: [15, 28, 52, 96, 177, 326, 600, 1104, 2031], largest: [2, 2, 3, 3, 6, 6, 10, 10, 20] },
    );
  });

  it('ring', () => {
    expectTable('pair-hopping-chain', 4, { parameters: ring, prepared: 'neel' }, { sectors: [14, 22, 44, 72, 140, 242, 458, 816, 1522] });
  });
});

describe('folded XXZ', () => {
  // Hilbert-space fragmentation from strict confinement, Phys. Rev. Lett. 124, 207602 (2020), DOI 10.1103/PhysRevLett.124.207602;
  // 2(F_{L+2} − 1) sectors, 2(F_{L+1} + 1) of them frozen.
  it('line', () => {
    const sizes = Array.from({ length: 9 }, (_, k) => k + 4);
    const closed = { sectors: sizes.map((L) => 2 * (fibonacci(L + 2) - 1)), frozen: sizes.map((L) => 2 * (fibonacci(L + 1) + 1)) };
    expect(closed.sectors.slice(0, 4)).toEqual([14, 24, 40, 66]);
    expectTable('folded-xxz-chain', 4, { parameters: line, prepared: 'neel' }, { ...closed, largest: [2, 3, 4, 6, 10, 15, 21, 35, 56] });
  });

  it('ring', () => {
    expectTable('folded-xxz-chain', 4, { parameters: ring, prepared: 'dimers' }, { sectors: [10, 16, 28, 38, 62, 88, 152, 224, 380] });
  });
});

describe('East models', () => {
  // Aspects of Hilbert space fragmentation in the quantum East model, arXiv:2409.15943; F_{L+3} − 1 (OEIS A000071), Catalan-triangle numbers.
  it('particles 110 <-> 101 on a line', () => {
    const sectors = Array.from({ length: 10 }, (_, k) => fibonacci(k + 6) - 1);
    expect(sectors.slice(0, 3)).toEqual([7, 12, 20]);
    expectTable(
      'east-hopping-chain',
      3,
      { parameters: line, prepared: 'domain-wall' },
      { sectors, largest: [2, 3, 5, 9, 14, 28, 48, 90, 165, 297] },
    );
  });

  it('spins: the first excited site of a line is conserved; a ring has the vacuum and the rest (closed form)', () => {
    for (const size of [3, 5, 8]) {
      const open = bruteForceSectors('quantum-east-chain', { size, parameters: line, prepared: 'seed' });
      expect(open.sizes).toEqual([...Array.from({ length: size }, (_, k) => 2 ** (size - 1 - k)), 1]);
      const closed = bruteForceSectors('quantum-east-chain', { size, parameters: ring, prepared: 'seed' });
      expect(closed.sizes).toEqual([2 ** size - 1, 1]);
    }
  });
});

describe('conserved numbers', () => {
  it.each([
    ['xxz-chain', 'neel', 6, 20],
    ['spin-one-chain', 'neel', 4, 19],
    ['t-jz-chain', 'pair-left', 5, 20],
    ['fermion-chain', 'density-wave', 6, 20],
    ['extended-bose-hubbard-chain', 'unit-filling', 4, 35],
  ])('%s from %s on %d sites: a space of %d, in one sector or more', (model, prepared, size, dimension) => {
    const found = bruteForceSectors(model, { size, prepared, parameters: line }, 'conserved');
    expect(found.dimension).toBe(dimension);
    expect(found.conserved).toBe(dimension);
    expect(found.sizes.reduce((a, b) => a + b, 0)).toBe(dimension);
  });
});
