/**
 * Accessible dimensions counted exactly, against closed forms, published models and the count by spectral weights, an independent route.
 */
import { describe, expect, it } from 'vitest';
import { findModel, modelFamilies } from '../../src/models/registry.js';
import type { Asked } from '../support/model-requests.js';
import { requestOf } from '../support/model-requests.js';
import { spectralMeasure } from '../../src/spectral/measure.js';
import { isPrime, PRIME_LIMIT } from '../../src/spectral/modular-field.js';
import { modularCount, type ModularCount } from '../../src/spectral/modular-count.js';

const counted = (model: string, asked: Asked): ModularCount => {
  const family = findModel(model);
  const request = requestOf(model, asked);
  return modularCount(family, request, family.build(request));
};

const dimension = (model: string, asked: Asked): number | null => counted(model, asked).dimension;

describe('closed forms', () => {
  it('ring: L/2 + 1 levels for even, (L + 1)/2 for odd L, any hopping', () => {
    // Quantum walks: the first detected passage time problem, Phys. Rev. E 95, 032141 (2017), 10.1103/PhysRevE.95.032141
    for (let size = 3; size <= 24; size += 1) {
      const levels = Math.floor(size / 2) + 1;
      expect(dimension('tight-binding', { size, coupling: 0.1, prepared: 'first' })).toBe(levels);
      expect(dimension('tight-binding', { size, coupling: 10 ** -0.7, prepared: 'first' })).toBe(levels);
    }
  });

  it('a line from its end: L levels; from the middle of an odd one (L + 1)/2', () => {
    const parameters = { geometry: 'line', onsite: 0.3 };
    expect(dimension('tight-binding', { size: 41, coupling: 0.7, parameters, prepared: 'first' })).toBe(41);
    expect(dimension('tight-binding', { size: 41, coupling: 0.7, parameters, prepared: 'center' })).toBe(21);
  });

  it('hypercube: n + 1, complete graph: 2', () => {
    // Quantum walks with infinite hitting times, Phys. Rev. A 74, 042334 (2006), 10.1103/PhysRevA.74.042334
    for (let size = 2; size <= 7; size += 1) expect(dimension('hypercube', { size, coupling: 0.3, prepared: 'origin' })).toBe(size + 1);
    for (const size of [3, 8, 30]) expect(dimension('complete-graph', { size, coupling: 1 / 3, prepared: 'first' })).toBe(2);
  });

  it('junction from one well: N + 1, also where weights are too small for double precision; from the middle N/2 + 1', () => {
    // Weights of 200 bosons without interaction are binomial, down to 2^-200.
    for (const [size, coupling] of [
      [200, 0],
      [60, 0.2],
      [60, 5],
    ] as const)
      expect(dimension('bose-hubbard-dimer', { size, coupling, prepared: 'all-left' })).toBe(size + 1);
    expect(dimension('bose-hubbard-dimer', { size: 120, coupling: 0.7, prepared: 'balanced' })).toBe(61);
  });
});

describe('many-body counts', () => {
  it('blockade chain from the vacuum, Heisenberg ring from the Néel state', () => {
    // Models: Quantum scarred eigenstates in a Rydberg atom chain, Phys. Rev. B 98, 155134 (2018), 10.1103/PhysRevB.98.155134 (from memory);
    // Linear magnetic chains with anisotropic coupling, Phys. Rev. 135, A640 (1964), 10.1103/PhysRev.135.A640 (from memory). The counts are
    // own, by diagonalisation in 60 digits; a Lanczos run reaches residuals of 1e-8 at the true step and goes on to 304 and 252.
    for (const omega of [1, 0.37]) {
      expect(dimension('pxp-chain', { size: 12, coupling: 0, parameters: { omega }, prepared: 'vacuum' })).toBe(23);
      expect(dimension('pxp-chain', { size: 8, coupling: 0, parameters: { omega, geometry: 'line' }, prepared: 'vacuum' })).toBe(29);
    }
    for (const J of [1, 0.1, 1 / 3, 10 ** 0.3]) {
      expect(dimension('xxz-chain', { size: 10, coupling: 1, parameters: { J }, prepared: 'neel' })).toBe(22);
    }
  });

  it('is smaller than the sector where couplings are uniform', () => {
    // Statistical localization: from strong fragmentation to strong edge modes, Phys. Rev. B 101, 125126 (2020), 10.1103/PhysRevB.101.125126;
    // The pair-flip model: a very entangled translationally invariant spin chain, arXiv:1805.07168; counts own.
    const line = { geometry: 'line' };
    expect(dimension('t-jz-chain', { size: 6, coupling: 0, parameters: line, prepared: 'pair-left' })).toBe(13);
    expect(dimension('pair-flip-chain', { size: 4, coupling: 0.7, parameters: line, prepared: 'paired' })).toBe(8);
    const dipole = { size: 7, coupling: 0, parameters: line, prepared: { occupation: [1, 2, 0, 2, 0, 2, 1] } };
    expect(dimension('dipole-spin-one-chain', dipole)).toBe(8);
    const folded = { size: 8, coupling: 0.3, parameters: line, prepared: { occupation: [0, 1, 0, 0, 1, 0, 0, 0] } };
    expect(dimension('folded-xxz-chain', folded)).toBe(8);
  });
});

/** What a family cannot do without. */
const NEEDED: Record<string, object> = {
  terms: {
    local: 'spin',
    terms: [
      { coefficient: 0.5, product: 'S+ S-', over: 'bonds', hc: true },
      { coefficient: 'coupling', product: 'Sz Sz', over: 'bonds' },
    ],
  },
};

describe('the count by weights', () => {
  it.each([...modelFamilies.keys()])('%s: agrees for every named state at two couplings', (model) => {
    const family = findModel(model);
    let compared = 0;
    for (const size of [Math.max(family.size.minimum, 4), 5].map((wanted) => Math.min(wanted, family.size.maximum))) {
      for (const coupling of [1, 10 ** -0.25]) {
        for (const { name } of family.states) {
          let request;
          try {
            request = requestOf(model, { size, coupling, prepared: name, parameters: NEEDED[model] ?? {} });
          } catch {
            continue; // a name without meaning at this size
          }
          const system = family.build(request);
          // No true weight of these small systems is below 1e-8, and rounding between close levels can leave 1e-26 (see below).
          const bright = spectralMeasure(system).measure.weights.filter((weight) => weight > 1e-20).length;
          const count = modularCount(family, request, system);
          if (count.dimension === null) continue;
          compared += 1;
          expect(count.dimension, `${name}, size ${size}, coupling ${coupling}`).toBe(bright);
        }
      }
    }
    expect(compared).toBeGreaterThan(2);
  });

  it('may be too large: weights that rounding leaves between close levels are no levels', () => {
    const family = findModel('quantum-east-chain');
    for (const coupling of [0.5, 0.8, 1, 1.3]) {
      const request = requestOf(family.name, { size: 4, coupling, prepared: 'uniform' });
      const system = family.build(request);
      expect(spectralMeasure(system).fields.accessible_dimension).toBeGreaterThanOrEqual(6);
      expect(modularCount(family, request, system).dimension).toBe(6);
    }
  });

  it.each(['orthogonal', 'unitary', 'symplectic'])(
    'random matrices, %s: every level, pairs of the symplectic ensemble once',
    (ensemble) => {
      const { dimension: levels, literals } = counted('random-matrix', { size: 9, parameters: { ensemble }, prepared: 'first' });
      expect(levels).toBe(9);
      expect(literals).toBeGreaterThan(0);
    },
  );

  it('disorder lifts what symmetry joins', () => {
    const asked = { size: 6, coupling: 0.5, prepared: 'neel' };
    const disorder = { strength: 0.7, seed: 3, realisation: 0 };
    expect(dimension('xxz-chain', asked)).toBe(6);
    expect(dimension('xxz-chain', { ...asked, disorder })).toBe(20);
  });
});

describe('states and roots', () => {
  it('superpositions: fractions and square roots, real and complex', () => {
    const parts = (amplitudes: readonly unknown[]) => ({
      superposition: amplitudes.map((amplitude, k) => [amplitude, { site: k + 1 }]),
    });
    const at = (prepared: unknown) => dimension('tight-binding', { size: 6, coupling: 0.3, prepared });
    // The span of sites 1 and 4 is even about both: levels k = 0, 1, 2, 3 of the ring.
    expect(
      at({
        superposition: [
          [0.6, { site: 1 }],
          [0.8, { site: 4 }],
        ],
      }),
    ).toBe(4);
    expect(at('uniform')).toBe(1);
    // Waves with k = π/3, whose energy is one level.
    expect(at(parts([1, 0.5, -0.5, -1, -0.5, 0.5]))).toBe(1);
    const [half, root] = [0.5, Math.sqrt(3) / 2];
    expect(
      at(
        parts([
          [1, 0],
          [half, root],
          [-half, root],
          [-1, 0],
          [-half, -root],
          [half, -root],
        ]),
      ),
    ).toBe(1);
    const bosons = {
      superposition: [
        [1, { occupation: [3, 0, 0] }],
        [[0, 1], { occupation: [1, 1, 1] }],
      ],
    };
    const family = findModel('bose-hubbard-chain');
    const request = requestOf(family.name, { size: 3, coupling: 0.3, prepared: bosons });
    const system = family.build(request);
    expect(modularCount(family, request, system).dimension).toBe(spectralMeasure(system).fields.accessible_dimension);
  });

  it('says why where it cannot count, and on what it relied', () => {
    const quench = counted('xxz-chain', { size: 6, coupling: 0.5, prepared: { 'ground-state': { coupling: 2 } } });
    expect(quench).toMatchObject({ dimension: null, counts: [], obstacle: expect.stringContaining('amplitudes') });
    const flux = counted('tight-binding', { size: 5, coupling: 0.5, parameters: { phase: 0.3 }, prepared: 'first' });
    expect(flux.dimension).toBe(5);
    expect(flux.literals).toBeGreaterThan(0);
    const plain = counted('tight-binding', { size: 5, coupling: 0.5, prepared: 'first' });
    expect(plain.literals).toBe(0);
    expect(plain.primes.every((p) => isPrime(p) && p < PRIME_LIMIT)).toBe(true);
    expect(new Set(plain.primes).size).toBe(2);
    expect(plain.counts).toEqual([3, 3]);
  });
});
