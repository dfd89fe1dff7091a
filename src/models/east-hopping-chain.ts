/** Particles that hop only beside a particle on their left: 110 <-> 101. */
import { z } from 'zod';
import { chargeRule } from './configuration-space.js';
import { localLabels } from './labels.js';
import { checkOnsite, geometryParameter, onsiteParameter, randomParameter, siteEnergies, termAmplitudes, windows } from './lattice.js';
import { halves, localMoves, repeated } from './local-moves.js';
import { defineProductFamily } from './product-family.js';
import type { ProductBasis, SystemRequest } from './types.js';

const STATES = '01';

const parameters = z.strictObject({ geometry: geometryParameter, onsite: onsiteParameter, random: randomParameter });

type Request = SystemRequest<z.infer<typeof parameters>>;

function basis({ size, coupling, disorder, parameters: { geometry, onsite, random } }: Request): ProductBasis {
  const energies = siteEnergies(onsite, random === 'hops' ? null : disorder, size);
  const stretches = windows(size, 3, geometry);
  return {
    sites: size,
    levels: 2,
    diagonal(c) {
      let energy = 0;
      for (let x = 0; x < size; x += 1) energy += energies[x] * c[x];
      return energy;
    },
    connect: localMoves(STATES, [
      { windows: stretches, amplitudes: termAmplitudes(coupling, disorder, random, stretches.length), moves: [['110', '101']] },
    ]),
  };
}

/**
 * H = J Σ n_x (b†_{x+1} b_{x+2} + h.c.) + Σ ε_x n_x for hard-core particles. Conserves their number; on a line everything left of the first
 * particle stays empty, so that there are F_{L+3} − 1 sectors (Fibonacci, F_1 = F_2 = 1).
 */
export const eastHoppingChain = defineProductFamily<z.infer<typeof parameters>>({
  name: 'east-hopping-chain',
  summary: 'Particle-conserving East model: H = J Σ_x n_x (b†_{x+1} b_{x+2} + h.c.) + Σ_x ε_x n_x for hard-core particles.',
  source:
    'Hilbert space fragmentation and slow dynamics in particle-conserving quantum East models, SciPost Phys. 15, 093 (2023), ' +
    'DOI 10.21468/SciPostPhys.15.3.093 (from memory)',
  energyUnit: 'that of the amplitude J, usually J = 1',
  size: { symbol: 'L', meaning: 'number of sites', minimum: 3, maximum: 64 },
  coupling: { symbol: 'J', meaning: 'amplitude of a hop' },
  scales: [{ name: 'J', meaning: 'the amplitude itself', toCoupling: (value) => value }],
  parameters,
  disordered: true,
  states: [
    { name: 'domain-wall', meaning: 'the left half filled, the right half empty', terms: ({ size }) => halves(STATES, size, '1', '0') },
    { name: 'neel', meaning: 'particles on sites 1, 3, 5, …', terms: ({ size }) => repeated(STATES, size, '10') },
    { name: 'dimers', meaning: '1100 repeated', terms: ({ size }) => repeated(STATES, size, '1100') },
  ],
  checkParameters: ({ size, parameters: { onsite } }) => checkOnsite(onsite, size),
  labels: ({ size }) => localLabels(size, STATES),
  rule: ({ size }) => chargeRule(size, 2, (value) => [value]),
  moves: ({ size }) => size,
  fragmented: true,
  basis,
});
