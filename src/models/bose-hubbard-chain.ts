/** Bosons on a ring or a line of sites. */
import { z } from 'zod';
import { binomial } from './combinatorics.js';
import { totalRule } from './configuration-space.js';
import { occupationLabels } from './labels.js';
import { bonds, checkOnsite, geometryParameter, onsiteParameter, siteEnergies } from './lattice.js';
import { defineProductFamily } from './product-family.js';
import { refusal } from './refusal.js';
import { basisState } from './states.js';
import type { Term } from './states.js';
import type { ProductBasis, SystemRequest } from './types.js';

/** The most a configuration entry holds. */
const MOST_PARTICLES = 65_535;

const parameters = z.strictObject({
  J: z.number().default(1).describe('hopping amplitude between neighbours'),
  particles: z
    .union([z.literal('size'), z.int().min(1).max(MOST_PARTICLES)])
    .default('size')
    .describe('number of bosons; size: one boson a site on average'),
  geometry: geometryParameter,
  onsite: onsiteParameter,
  tilt: z
    .number()
    .default(0)
    .describe('energy drop of a boson from each site to the next: + tilt Σ_x ((L+1)/2 − x) n_x (on a ring the closing bond climbs back)'),
});

type Request = SystemRequest<z.infer<typeof parameters>>;

const particlesOf = ({ size, parameters: { particles } }: Request): number => (particles === 'size' ? size : particles);

/** The bosons shared equally among the chosen sites; null where they cannot be. */
function shared(request: Request, chosen: (site: number) => boolean): readonly Term[] | null {
  const sites = Array.from({ length: request.size }, (_, site) => chosen(site));
  const each = particlesOf(request) / sites.filter(Boolean).length;
  return Number.isInteger(each) ? basisState(sites.map((filled) => (filled ? each : 0))) : null;
}

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
    connect(n, emit) {
      const hop = (from: number, to: number): void => {
        if (n[from] === 0) return;
        const amplitude = -J * Math.sqrt(n[from] * (n[to] + 1));
        n[from] -= 1;
        n[to] += 1;
        emit(amplitude);
        n[from] += 1;
        n[to] -= 1;
      };
      for (const [x, y] of neighbours) {
        hop(x, y);
        hop(y, x);
      }
    },
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
  states: [
    {
      name: 'unit-filling',
      meaning: 'one boson on every site',
      needs: 'as many bosons as sites',
      terms: (request) => (particlesOf(request) === request.size ? shared(request, () => true) : null),
    },
    { name: 'all-left', meaning: 'all bosons on the first site', terms: (request) => shared(request, (site) => site === 0) },
    { name: 'all-right', meaning: 'all bosons on the last site', terms: (request) => shared(request, (site) => site === request.size - 1) },
    {
      name: 'domain-wall',
      meaning: 'the left half of the sites filled evenly, the right half empty',
      needs: 'an even number of sites, and bosons that fill half of them evenly',
      terms: (request) => (request.size % 2 === 0 ? shared(request, (site) => site < request.size / 2) : null),
    },
    {
      name: 'density-wave',
      meaning: 'sites 1, 3, 5, … filled evenly, the others empty',
      needs: 'bosons that fill every other site evenly',
      terms: (request) => shared(request, (site) => site % 2 === 0),
    },
  ],
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
