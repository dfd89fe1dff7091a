/** What the chain families refuse, how their scales read, how their extents and disorder behave. */
import { describe, expect, it } from 'vitest';
import { WindrowError } from '../../../src/core/errors.js';
import { nextNeighbours, windows } from '../../../src/models/lattice.js';
import { findModel } from '../../../src/models/registry.js';
import { requestOf, systemOf } from '../../support/model-requests.js';
import { bruteForceSectors } from '../../support/brute-force-sectors.js';
import { densePlanes } from '../../support/exact-spectrum.js';

const caught = (action: () => unknown): WindrowError => {
  try {
    action();
  } catch (error) {
    if (error instanceof WindrowError) return error;
    throw error;
  }
  throw new Error('nothing was thrown');
};

describe('stretches of sites', () => {
  it('wrap on a ring once each', () => {
    expect(windows(4, 3, 'line')).toEqual([
      [0, 1, 2],
      [1, 2, 3],
    ]);
    expect(windows(3, 3, 'ring')).toEqual([
      [0, 1, 2],
      [1, 2, 0],
      [2, 0, 1],
    ]);
    expect(windows(2, 2, 'ring')).toEqual([[0, 1]]);
    expect(windows(2, 3, 'ring')).toEqual([]);
    expect(nextNeighbours(4, 'ring')).toEqual([
      [0, 2],
      [1, 3],
    ]);
    expect(nextNeighbours(5, 'ring')).toHaveLength(5);
    expect(nextNeighbours(5, 'line')).toEqual([
      [0, 2],
      [1, 3],
      [2, 4],
    ]);
  });
});

describe('refusals', () => {
  it.each<[string, string, object, string, RegExp]>([
    [
      'more fermions than sites',
      'fermion-chain',
      { parameters: { particles: 5 }, prepared: 'domain-wall' },
      'parameters.particles',
      /at most 4/,
    ],
    [
      'more bosons than room',
      'extended-bose-hubbard-chain',
      { parameters: { particles: 9, most: 2 }, prepared: 'all-left' },
      'parameters.particles',
      /at most 8/,
    ],
    ['a field list of another length', 'xxz-chain', { parameters: { field: [1, 2] }, prepared: 'neel' }, 'parameters.field', /4 numbers/],
    [
      'an onsite list of another length',
      'pxp-chain',
      { parameters: { onsite: [1, 2] }, prepared: 'vacuum' },
      'parameters.onsite',
      /4 numbers/,
    ],
    [
      'an unknown ensemble',
      'random-matrix',
      { parameters: { ensemble: 'GOE' }, prepared: 'first' },
      'parameters.ensemble',
      /orthogonal \| unitary \| symplectic/,
    ],
    [
      'disorder on a graph without it',
      'hypercube',
      { disorder: { strength: 1, seed: 1, realisation: 0 }, prepared: 'origin' },
      'disorder',
      /no disorder/,
    ],
    ['one colour', 'pair-flip-chain', { parameters: { colours: 1 }, prepared: 'one-colour' }, 'parameters.colours', /≥ 2/],
  ])('%s', (_what, model, asked, where, allowed) => {
    const error = caught(() => requestOf(model, { size: 4, ...asked }));
    expect(error.code).toBe('model.parameter');
    expect(error.details.where).toBe(where);
    expect(error.details.allowed).toMatch(allowed);
  });

  it.each([
    ['pxp-chain', 5, 'neel'],
    ['pxp-chain', 4, 'period-three'],
    ['extended-bose-hubbard-chain', 3, 'domain-wall'],
    ['collective-spin', 3, 'balanced'],
  ])('%s of size %d has no %s', (model, size, prepared) => {
    expect(caught(() => requestOf(model, { size, prepared })).code).toBe('state.invalid');
  });

  it('a state that holds more than a site may', () => {
    expect(caught(() => requestOf('extended-bose-hubbard-chain', { size: 4, parameters: { most: 2 }, prepared: 'all-left' })).code).toBe(
      'state.invalid',
    );
  });
});

describe('scales of the coupling', () => {
  it.each([
    ['ising-chain', 'g/J', { J: 2 }, 8, 3],
    ['extended-bose-hubbard-chain', 'V/J', { J: 2 }, 8, 3],
    ['fermion-chain', 'V/J', { J: 2 }, 8, 3],
    ['collective-spin', 'λ/h', { field: 2 }, 8, 3],
  ])('%s, %s', (model, name, parameters, size, value) => {
    const scale = findModel(model).scales.find((candidate) => candidate.name === name);
    expect(scale?.toCoupling(value, size, parameters)).toBe(6);
    const zero = Object.fromEntries(Object.keys(parameters).map((key) => [key, 0]));
    expect(caught(() => scale?.toCoupling(value, size, zero)).code).toBe('model.coupling');
  });

  it('the amplitude of a complete graph times its vertices', () => {
    expect(findModel('complete-graph').scales[1]?.toCoupling(1, 64, {})).toBe(1 / 64);
  });
});

describe('fragmented chains', () => {
  it('cost what the sector costs: 3432 states of 2^28, counted before anything is built', () => {
    const asked = { size: 28, parameters: { geometry: 'line' }, prepared: 'pairs' };
    const extent = findModel('pair-hopping-chain').extent(requestOf('pair-hopping-chain', asked));
    expect(extent.dimension).toBe(3432);
    expect(systemOf('pair-hopping-chain', asked).sectorDimension).toBe(3432);
    // The configurations with the same number and centre of mass, far fewer than C(28, 14) = 40116600.
    expect(extent.hilbertDimension).toBeLessThan(40_116_600);
    expect(extent.hilbertDimension).toBeGreaterThan(3432);
  });

  it('a term of amplitude zero is no move: the extent follows the coupling', () => {
    const dimension = (coupling: number): number => {
      const asked = { size: 7, coupling, parameters: { geometry: 'line' }, prepared: { product: '0+-+-+0' } };
      return findModel('dipole-spin-one-chain').extent(requestOf('dipole-spin-one-chain', asked)).dimension;
    };
    const listed = (coupling: number): number | undefined => {
      const asked = { size: 7, coupling, parameters: { geometry: 'line' }, prepared: { product: '0+-+-+0' } };
      return bruteForceSectors('dipole-spin-one-chain', asked, 'conserved').sizes[0];
    };
    expect([dimension(0), dimension(1), dimension(0)]).toEqual([listed(0), listed(1), listed(0)]);
    expect(dimension(1)).toBeGreaterThan(dimension(0));
  });
});

describe('what disorder makes random', () => {
  const planes = (random: string, strength: number) =>
    densePlanes(
      systemOf('folded-xxz-chain', {
        size: 8,
        parameters: { random },
        disorder: { strength, seed: 3, realisation: 1 },
        prepared: { product: '01001000' },
      }).matrix,
    ).re;
  const diagonal = (random: string) => planes(random, 1).diagonal();
  const hops = (random: string) =>
    new Set(
      planes(random, 1)
        .to1DArray()
        .filter((x, i) => x !== 0 && i % (planes(random, 1).rows + 1) !== 0),
    );

  it('onsite, hops or both', () => {
    expect(diagonal('hops').every((x) => x === 0)).toBe(true);
    expect(new Set(diagonal('onsite')).size).toBeGreaterThan(3);
    expect(diagonal('both')).toEqual(diagonal('onsite'));
    expect(hops('onsite')).toEqual(new Set([1]));
    expect(hops('hops').size).toBeGreaterThan(3);
    expect(hops('both')).toEqual(hops('hops'));
    for (const hop of hops('hops')) expect(Math.abs(hop - 1)).toBeLessThanOrEqual(0.5);
  });

  it('stretches one draw with the strength', () => {
    const [one, two] = [planes('both', 1), planes('both', 2)];
    const clean = planes('both', 0);
    one.to1DArray().forEach((x, i) => expect(2 * (x - clean.to1DArray()[i])).toBeCloseTo(two.to1DArray()[i] - clean.to1DArray()[i], 14));
  });
});
