import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { ConfigurationIndex } from '../../../src/models/configuration-index.js';
import { exploreSector, measureSector } from '../../../src/models/product-basis.js';
import type { ProductBasis } from '../../../src/models/types.js';
import { levelsOf } from '../../support/exact-spectrum.js';

/** Pairs hop by two sites, 1001 <-> 0110, on an open chain: the space splits into exponentially many sectors. */
const pairHopping = (sites: number, amplitude: (x: number) => [number, number] = () => [1, 0]): ProductBasis => ({
  sites,
  levels: 2,
  diagonal: () => 0,
  connect(c, emit) {
    for (let x = 0; x + 3 < sites; x += 1) {
      const outer = c[x];
      if (c[x + 3] !== outer || c[x + 1] !== 1 - outer || c[x + 2] !== 1 - outer) continue;
      const [re, im] = amplitude(x);
      for (let y = x; y < x + 4; y += 1) c[y] = 1 - c[y];
      emit(re, outer === 1 ? im : -im);
      for (let y = x; y < x + 4; y += 1) c[y] = 1 - c[y];
    }
  },
});

const bits = (text: string): number[] => Array.from(text, Number);

const bitsOf = (value: number, sites: number): number[] =>
  Array.from({ length: sites }, (_, x) => Math.floor(value / 2 ** (sites - 1 - x)) % 2);

describe('search of sectors', () => {
  // Thermalization and its absence within Krylov subspaces of a constrained Hamiltonian, arXiv:1910.14048; the number of sectors is
  // OEIS A008937(L + 1), the largest has C(⌊L/2⌋, ⌊L/4⌋) states.
  it.each([
    [4, 15, 2],
    [5, 28, 2],
    [6, 52, 3],
    [7, 96, 3],
    [8, 177, 6],
    [9, 326, 6],
    [10, 600, 10],
  ])('pair hopping on %d sites: %d sectors, the largest of %d states', (sites, sectors, largest) => {
    const basis = pairHopping(sites);
    let inverse = 0;
    let most = 0;
    for (let value = 0; value < 2 ** sites; value += 1) {
      const { dimension } = exploreSector(basis, [bitsOf(value, sites)]).matrix;
      inverse += 1 / dimension;
      most = Math.max(most, dimension);
    }
    expect(inverse).toBeCloseTo(sectors, 6);
    expect(most).toBe(largest);
  });

  it('visits the sector only: C(14, 7) = 3432 states of a space of 2^28, and stops at a limit', () => {
    const pairs = Array.from({ length: 28 }, (_, x) => (x % 4 === 0 || x % 4 === 3 ? 1 : 0));
    expect(exploreSector(pairHopping(28), [pairs]).matrix.dimension).toBe(3432);
    expect(measureSector(pairHopping(28), [pairs], 3432)?.dimension).toBe(3432);
    expect(measureSector(pairHopping(28), [pairs], 3431)).toBeNull();
  });

  it('numbers rows in lexicographic order, whatever state it began from', () => {
    const [a, b] = ['100110011001', '011001101001'].map((text) => bits(text));
    const basis = pairHopping(12);
    const [first, second] = [exploreSector(basis, [a]), exploreSector(basis, [b])];
    expect(first.matrix.dimension).toBe(20);
    expect(second.matrix).toEqual(first.matrix);
    const rows = [];
    for (let value = 0; value < 4096; value += 1) rows.push(first.indexOf(bitsOf(value, 12)));
    expect(rows.filter((row) => row >= 0)).toEqual(Array.from({ length: 20 }, (_, i) => i));
  });

  it('joins the sectors of several seeds and counts elements as it stores them', () => {
    const basis = pairHopping(8);
    const seeds = ['10010000', '11110000', '10010000'].map((text) => bits(text));
    const { matrix } = exploreSector(basis, seeds);
    expect(matrix.dimension).toBe(exploreSector(basis, [seeds[0]]).matrix.dimension + exploreSector(basis, [seeds[1]]).matrix.dimension);
    expect(measureSector(basis, seeds, 100)).toEqual({
      dimension: matrix.dimension,
      nonzeros: (matrix as { column: Int32Array }).column.length,
    });
  });

  it('phases of an open chain can be gauged away: the same levels, Hermitian planes', () => {
    const seed = [1, 0, 0, 1, 1, 0, 0, 1];
    const real = exploreSector(pairHopping(8), [seed]).matrix;
    const complex = exploreSector(
      pairHopping(8, () => [Math.cos(0.4), Math.sin(0.4)]),
      [seed],
    ).matrix;
    expect(complex.kind === 'sparse' && complex.im !== null).toBe(true);
    const [a, b] = [levelsOf(real), levelsOf(complex)];
    a.forEach((level, i) => expect(level).toBeCloseTo(b[i], 12));
  });

  it('sums reports of the same element, drops zeros, and is real where imaginary parts cancel', () => {
    const pair: ProductBasis = {
      sites: 1,
      levels: 3,
      diagonal: ([c]) => c,
      connect(c, emit) {
        if (c[0] === 2) return;
        c[0] = 1 - c[0];
        emit(0.5, 0.25);
        emit(0.25, -0.25);
        c[0] = 1 - c[0];
        const here = c[0];
        c[0] = 2;
        emit(0);
        c[0] = here;
      },
    };
    expect(exploreSector(pair, [[0]]).matrix).toEqual({
      kind: 'sparse',
      dimension: 2,
      rowStart: Int32Array.of(0, 2, 4),
      column: Int32Array.of(0, 1, 0, 1),
      re: Float64Array.of(0, 0.75, 0.75, 1),
      im: null,
    });
  });

  it('puts <c|H|c′> into row c, column c′', () => {
    const pair: ProductBasis = {
      sites: 1,
      levels: 2,
      diagonal: () => 0,
      connect(c, emit) {
        c[0] = 1 - c[0];
        emit(0, c[0] === 1 ? 1 : -1); // <1|H|0> = i
        c[0] = 1 - c[0];
      },
    };
    expect(exploreSector(pair, [[0]]).matrix).toMatchObject({ column: Int32Array.of(0, 1, 0, 1), im: Float64Array.of(0, -1, 1, 0) });
  });
});

describe('configuration index', () => {
  it('numbers, finds, reads back and sorts any configurations', () => {
    const lists = fc.tuple(fc.integer({ min: 1, max: 40 }), fc.constantFrom(1, 2, 3, 5, 17, 256, 300, 65536)).chain(([sites, levels]) =>
      fc.record({
        sites: fc.constant(sites),
        levels: fc.constant(levels),
        values: fc.array(fc.array(fc.nat({ max: levels - 1 }), { minLength: sites, maxLength: sites }), { minLength: 1, maxLength: 200 }),
      }),
    );
    fc.assert(
      fc.property(lists, ({ sites, levels, values }) => {
        const index = new ConfigurationIndex(sites, levels);
        const known = new Map<string, number>();
        for (const list of values) {
          const key = list.join();
          const expected = known.get(key) ?? known.size;
          known.set(key, expected);
          expect(index.add(Uint16Array.from(list))).toBe(expected);
        }
        expect(index.count).toBe(known.size);
        const out = new Uint16Array(sites);
        const read = (number: number): number[] => {
          index.read(number, out);
          return [...out];
        };
        for (const [key, number] of known) {
          expect(read(number).join()).toBe(key);
          expect(index.find(out)).toBe(number);
        }
        const compare = (a: number[], b: number[]): number => a.map((x, i) => x - b[i]).find((d) => d !== 0) ?? 0;
        const sorted = [...index.sorted()].map(read);
        expect(sorted).toEqual([...sorted].sort(compare));
        expect(new Set(sorted.map((list) => list.join())).size).toBe(known.size);
        out.fill(levels - 1);
        if (!known.has([...out].join())) expect(index.find(out)).toBe(-1);
      }),
      { numRuns: 100 },
    );
  });

  it('holds many: all 2^17 bit strings keep their numbers', () => {
    const index = new ConfigurationIndex(17, 2);
    const bits = new Uint16Array(17);
    const fill = (value: number): Uint16Array => {
      for (let x = 0; x < 17; x += 1) bits[x] = (value >> x) & 1;
      return bits;
    };
    for (let value = 0; value < 131_072; value += 1) index.add(fill(value));
    expect(index.count).toBe(131_072);
    let wrong = 0;
    for (let value = 0; value < 131_072; value += 1) if (index.find(fill(value)) !== value) wrong += 1;
    expect(wrong).toBe(0);
  });
});
