/** Hops that keep the number of domain walls: the XXZ chain at large anisotropy. */
import { z } from 'zod';
import type { ConfigurationRule } from './configuration-space.js';
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
  const stretches = windows(size, 4, geometry);
  return {
    sites: size,
    levels: 2,
    diagonal(c) {
      let energy = 0;
      for (let x = 0; x < size; x += 1) energy += energies[x] * c[x];
      return energy;
    },
    connect: localMoves(STATES, [
      {
        windows: stretches,
        amplitudes: termAmplitudes(coupling, disorder, random, stretches.length),
        moves: [
          ['0100', '0010'],
          ['1101', '1011'],
        ],
      },
    ]),
  };
}

/** Conserves the number of particles and of unequal neighbours; remembers the first and the last value read. */
function wallRule(size: number, ring: boolean): ConfigurationRule {
  return {
    sites: size,
    levels: 2,
    start: [0, 0, 0, 0],
    step: ([particles, walls, first, last], value, site) =>
      site === 0 ? [value, 0, value, value] : [particles + value, walls + (value === last ? 0 : 1), first, value],
    finish: ([particles, walls, first, last]) => [particles, walls + (ring && first !== last ? 1 : 0)],
  };
}

/**
 * H = J Σ [(1 + σz_{x−1} σz_{x+2})/2] (σ⁺_x σ⁻_{x+1} + h.c.) + Σ ε_x n_x: a hop between x and x + 1 where x − 1 and x + 2 are equal. On a
 * line the first and the last site never move. Conserves the number of particles and of domain walls; the dimension counts the configurations
 * with those of φ.
 */
export const foldedXxzChain = defineProductFamily<z.infer<typeof parameters>>({
  name: 'folded-xxz-chain',
  summary: 'Folded XXZ chain: H = J Σ_x [(1 + σz_{x−1} σz_{x+2})/2] (σ⁺_x σ⁻_{x+1} + h.c.) + Σ_x ε_x n_x; hops that keep the domain walls.',
  source:
    'Hilbert-space fragmentation from strict confinement, Phys. Rev. Lett. 124, 207602 (2020), DOI 10.1103/PhysRevLett.124.207602; Integrable spin ' +
    'chain with Hilbert space fragmentation and solvable real-time dynamics, Phys. Rev. E 104, 044106 (2021), DOI 10.1103/PhysRevE.104.044106',
  energyUnit: 'that of the amplitude J, usually J = 1',
  size: { symbol: 'L', meaning: 'number of sites', minimum: 4, maximum: 48 },
  coupling: { symbol: 'J', meaning: 'amplitude of a hop' },
  scales: [{ name: 'J', meaning: 'the amplitude itself', toCoupling: (value) => value }],
  parameters,
  disordered: true,
  states: [
    { name: 'dilute', meaning: 'particles on sites 2, 5, 8, …', terms: ({ size }) => repeated(STATES, size, '010') },
    { name: 'neel', meaning: 'particles on sites 1, 3, 5, …', terms: ({ size }) => repeated(STATES, size, '10') },
    { name: 'domain-wall', meaning: 'the left half filled, the right half empty', terms: ({ size }) => halves(STATES, size, '1', '0') },
    { name: 'dimers', meaning: '1100 repeated', terms: ({ size }) => repeated(STATES, size, '1100') },
  ],
  checkParameters: ({ size, parameters: { onsite } }) => checkOnsite(onsite, size),
  labels: ({ size }) => localLabels(size, STATES),
  rule: ({ size, parameters: { geometry } }) => wallRule(size, geometry === 'ring'),
  moves: ({ size }) => size,
  fragmented: true,
  basis,
});
