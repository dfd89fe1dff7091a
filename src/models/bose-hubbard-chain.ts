/** Bosons on a ring or a line of sites. */
import { z } from 'zod';
import { bosonHops, bosonNumber, bosonStates, particlesOf } from './bosons.js';
import { binomial } from './combinatorics.js';
import { totalRule } from './configuration-space.js';
import { occupationLabels } from './labels.js';
import { bonds, checkOnsite, geometryParameter, onsiteParameter, siteEnergies } from './lattice.js';
import { defineProductFamily } from './product-family.js';
import { refusal } from './refusal.js';
import type { ProductBasis, SystemRequest } from './types.js';

const parameters = z.strictObject({
  J: z.number().default(1).describe('hopping amplitude between neighbours'),
  particles: bosonNumber,
  geometry: geometryParameter,
  onsite: onsiteParameter,
  tilt: z
    .number()
    .default(0)
    .describe('energy drop of a boson from each site to the next: + tilt Σ_x ((L+1)/2 − x) n_x (on a ring the closing bond climbs back)'),
});

type Request = SystemRequest<z.infer<typeof parameters>>;

function basis(request: Request): ProductBasis {
  const { size, coupling, disorder } = request;
  const { J, geometry, onsite, tilt } = request.parameters;
  const energies = siteEnergies(onsite, disorder, size).map((energy, x) => energy + tilt * ((size - 1) / 2 - x));
  const neighbours = bonds(size, geometry);
  return {
    sites: size,
    levels: particlesOf(request) + 1,
    diagonal(n) {
      let energy = 0;
      for (let x = 0; x < size; x += 1) energy += n[x] * (energies[x] + (coupling * (n[x] - 1)) / 2);
      return energy;
    },
    connect: bosonHops(neighbours, new Float64Array(neighbours.length).fill(-J), particlesOf(request)),
  };
}

/**
 * H = −J Σ_x (b†_x b_{x+1} + h.c.) + (U/2) Σ_x n_x(n_x − 1) + Σ_x ε_x n_x at fixed N, each bond once; D = C(N + L − 1, N).
 * Occupations are ordered lexicographically, ascending.
 */
export const boseHubbardChain = defineProductFamily<z.infer<typeof parameters>>({
  name: 'bose-hubbard-chain',
  summary: 'Bosons on a chain: H = −J Σ_x (b†_x b_{x+1} + h.c.) + (U/2) Σ_x n_x(n_x−1) + Σ_x ε_x n_x, each bond once.',
  source:
    'Exact diagonalization: the Bose-Hubbard model as an example, Eur. J. Phys. 31, 591 (2010), DOI 10.1088/0143-0807/31/3/016 (from memory)',
  energyUnit: 'that of U and J, usually J = 1',
  size: { symbol: 'L', meaning: 'number of sites', minimum: 1, maximum: 256 },
  coupling: { symbol: 'U', meaning: 'interaction energy of a pair of bosons on one site' },
  scales: [
    { name: 'U', meaning: 'the interaction energy itself', toCoupling: (value) => value },
    {
      name: 'U/J',
      meaning: 'interaction in units of the hopping',
      toCoupling(value, _size, { J }) {
        if (J === 0 || typeof J !== 'number')
          throw refusal('model.coupling', 'U/J is not defined without hopping', 'parameters.J', J, 'J ≠ 0, or the scale U');
        return J * value;
      },
    },
  ],
  parameters,
  disordered: true,
  complete: (given, size) => ({ ...given, particles: given.particles === 'size' ? size : given.particles }),
  states: bosonStates,
  checkParameters({ size, parameters: { onsite } }) {
    checkOnsite(onsite, size);
  },
  labels: (request) =>
    occupationLabels({ sites: request.size, levels: particlesOf(request) + 1, total: particlesOf(request), unit: 'bosons' }),
  hilbertDimension: (request) => binomial(particlesOf(request) + request.size - 1, particlesOf(request)),
  rule: (request) => totalRule(request.size, particlesOf(request) + 1, particlesOf(request)),
  moves: ({ size, parameters: { geometry } }) => 2 * bonds(size, geometry).length,
  // Each bond moves a boson either way, from the C(N + L − 2, N − 1) configurations that have one on the site it leaves.
  nonzeros(request) {
    const particles = particlesOf(request);
    const sites = request.size;
    const moves = 2 * bonds(sites, request.parameters.geometry).length * binomial(particles + sites - 2, particles - 1);
    return binomial(particles + sites - 1, particles) + moves;
  },
  basis,
});
