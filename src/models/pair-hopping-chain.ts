/** Particles that hop in pairs, outwards and inwards together: 0110 <-> 1001. */
import { z } from 'zod';
import { dipoleRule } from './configuration-space.js';
import { localLabels } from './labels.js';
import {
  bonds,
  checkOnsite,
  geometryParameter,
  onsiteParameter,
  randomParameter,
  siteEnergies,
  termAmplitudes,
  windows,
} from './lattice.js';
import { halves, localMoves, repeated } from './local-moves.js';
import { defineProductFamily } from './product-family.js';
import type { ProductBasis, SystemRequest } from './types.js';

const STATES = '01';

const parameters = z.strictObject({
  V: z.number().default(0).describe('interaction of neighbouring particles: + V Σ_x n_x n_{x+1}'),
  geometry: geometryParameter,
  onsite: onsiteParameter,
  random: randomParameter,
});

type Request = SystemRequest<z.infer<typeof parameters>>;

function basis({ size, coupling, disorder, parameters: { V, geometry, onsite, random } }: Request): ProductBasis {
  const energies = siteEnergies(onsite, random === 'hops' ? null : disorder, size);
  const pairs = bonds(size, geometry);
  const stretches = windows(size, 4, geometry);
  return {
    sites: size,
    levels: 2,
    diagonal(c) {
      let energy = 0;
      for (let x = 0; x < size; x += 1) energy += energies[x] * c[x];
      for (const [x, y] of pairs) energy += V * c[x] * c[y];
      return energy;
    },
    connect: localMoves(STATES, [
      { windows: stretches, amplitudes: termAmplitudes(coupling, disorder, random, stretches.length), moves: [['0110', '1001']] },
    ]),
  };
}

/**
 * H = J Σ (b†_x b_{x+1} b_{x+2} b†_{x+3} + h.c.) + V Σ n_x n_{x+1} + Σ ε_x n_x for hard-core particles. Conserves their number and their
 * centre of mass (on a ring Σ x n_x modulo L); the dimension counts the configurations with those of φ. On a line fermions are the same.
 */
export const pairHoppingChain = defineProductFamily<z.infer<typeof parameters>>({
  name: 'pair-hopping-chain',
  summary: 'Pair hopping 0110 <-> 1001: H = J Σ_x (b†_x b_{x+1} b_{x+2} b†_{x+3} + h.c.) + V Σ_x n_x n_{x+1} + Σ_x ε_x n_x.',
  source:
    'Thermalization and its absence within Krylov subspaces of a constrained Hamiltonian, memorial volume, World Scientific (2021), ' +
    'DOI 10.1142/9789811231711_0009 (from memory; arXiv:1910.14048)',
  energyUnit: 'that of the amplitude J, usually J = 1',
  size: { symbol: 'L', meaning: 'number of sites', minimum: 4, maximum: 48 },
  coupling: { symbol: 'J', meaning: 'amplitude of a pair hop' },
  scales: [{ name: 'J', meaning: 'the amplitude itself', toCoupling: (value) => value }],
  parameters,
  disordered: true,
  states: [
    { name: 'pairs', meaning: '1001 repeated: particles in neighbouring pairs', terms: ({ size }) => repeated(STATES, size, '1001') },
    { name: 'neel', meaning: 'particles on sites 1, 3, 5, …', terms: ({ size }) => repeated(STATES, size, '10') },
    { name: 'domain-wall', meaning: 'the left half filled, the right half empty', terms: ({ size }) => halves(STATES, size, '1', '0') },
  ],
  checkParameters: ({ size, parameters: { onsite } }) => checkOnsite(onsite, size),
  labels: ({ size }) => localLabels(size, STATES),
  rule: ({ size, parameters: { geometry } }) => dipoleRule(size, 2, geometry === 'ring', (value) => value),
  moves: ({ size }) => size,
  fragmented: true,
  basis,
});
