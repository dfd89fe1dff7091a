/** Bosons on a chain that also repel or attract on neighbouring sites, with an optional limit of bosons a site. */
import { z } from 'zod';
import { bosonHops, bosonNumber, bosonStates, mostOf, particlesOf } from './bosons.js';
import { totalRule } from './configuration-space.js';
import { occupationLabels } from './labels.js';
import { bonds, checkOnsite, geometryParameter, onsiteParameter, randomParameter, siteEnergies, termAmplitudes } from './lattice.js';
import { defineProductFamily } from './product-family.js';
import { refusal } from './refusal.js';
import type { ProductBasis, SystemRequest } from './types.js';

const parameters = z.strictObject({
  J: z.number().default(1).describe('hopping amplitude between neighbours'),
  U: z.number().default(0).describe('interaction energy of a pair of bosons on one site'),
  particles: bosonNumber,
  most: z
    .union([z.literal('particles'), z.int().min(1).max(65_535)])
    .default('particles')
    .describe('most bosons a site holds; 1 is hard-core bosons, particles: no limit'),
  geometry: geometryParameter,
  onsite: onsiteParameter,
  random: randomParameter,
});

type Request = SystemRequest<z.infer<typeof parameters>>;

function basis(request: Request): ProductBasis {
  const { size, coupling, disorder, parameters } = request;
  const { J, U, geometry, onsite, random } = parameters;
  const energies = siteEnergies(onsite, random === 'hops' ? null : disorder, size);
  const neighbours = bonds(size, geometry);
  return {
    sites: size,
    levels: mostOf(request) + 1,
    diagonal(n) {
      let energy = 0;
      for (let x = 0; x < size; x += 1) energy += n[x] * (energies[x] + (U * (n[x] - 1)) / 2);
      for (const [x, y] of neighbours) energy += coupling * n[x] * n[y];
      return energy;
    },
    connect: bosonHops(neighbours, termAmplitudes(-J, disorder, random, neighbours.length), mostOf(request)),
  };
}

/**
 * H = −J Σ (b†_x b_{x+1} + h.c.) + (U/2) Σ n_x(n_x − 1) + V Σ n_x n_{x+1} + Σ ε_x n_x at fixed N, each bond once. Two sites with
 * V = U are free bosons shifted by U N(N − 1)/2.
 */
export const extendedBoseHubbardChain = defineProductFamily<z.infer<typeof parameters>>({
  name: 'extended-bose-hubbard-chain',
  summary: 'Extended Bose–Hubbard chain: H = −J Σ_x (b†_x b_{x+1} + h.c.) + (U/2) Σ_x n_x(n_x−1) + V Σ_x n_x n_{x+1} + Σ_x ε_x n_x.',
  source: 'Hidden order in 1D Bose insulators, Phys. Rev. Lett. 97, 260401 (2006), DOI 10.1103/PhysRevLett.97.260401 (from memory)',
  energyUnit: 'that of V, U and J, usually J = 1',
  size: { symbol: 'L', meaning: 'number of sites', minimum: 1, maximum: 256 },
  coupling: { symbol: 'V', meaning: 'interaction energy of two bosons on neighbouring sites' },
  scales: [
    { name: 'V', meaning: 'the interaction energy itself', toCoupling: (value) => value },
    {
      name: 'V/J',
      meaning: 'interaction in units of the hopping',
      toCoupling(value, _size, { J }) {
        if (J === 0 || typeof J !== 'number')
          throw refusal('model.coupling', 'V/J is not defined without hopping', 'parameters.J', J, 'J ≠ 0, or the scale V');
        return J * value;
      },
    },
  ],
  parameters,
  disordered: true,
  complete: (given, size) => ({ ...given, particles: given.particles === 'size' ? size : given.particles }),
  states: bosonStates,
  checkParameters(request) {
    checkOnsite(request.parameters.onsite, request.size);
    const room = mostOf(request) * request.size;
    if (particlesOf(request) > room)
      throw refusal(
        'model.parameter',
        'there are more bosons than the sites hold',
        'parameters.particles',
        particlesOf(request),
        `at most ${room}`,
      );
  },
  labels: (request) => occupationLabels({ sites: request.size, levels: mostOf(request) + 1, total: particlesOf(request), unit: 'bosons' }),
  rule: (request) => totalRule(request.size, mostOf(request) + 1, particlesOf(request)),
  moves: ({ size, parameters: { geometry } }) => 2 * bonds(size, geometry).length,
  basis,
});
