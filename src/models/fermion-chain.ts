/** Spinless fermions with hops and interactions to nearest and next neighbours. */
import { z } from 'zod';
import { binomial } from './combinatorics.js';
import { totalRule } from './configuration-space.js';
import { occupationLabels } from './labels.js';
import {
  bonds,
  checkOnsite,
  geometryParameter,
  nextNeighbours,
  onsiteParameter,
  randomParameter,
  siteEnergies,
  termAmplitudes,
} from './lattice.js';
import { defineProductFamily } from './product-family.js';
import { refusal } from './refusal.js';
import { basisState } from './states.js';
import type { Term } from './states.js';
import type { ProductBasis, SystemRequest } from './types.js';

const parameters = z.strictObject({
  J: z.number().default(1).describe('hopping amplitude between nearest neighbours'),
  'next-J': z.number().default(0).describe('hopping amplitude J₂ between next neighbours'),
  'next-V': z.number().default(0).describe('interaction V₂ between next neighbours'),
  particles: z
    .union([z.literal('half'), z.int().min(0).max(256)])
    .default('half')
    .describe('number of fermions; half: half the number of sites, rounded down'),
  geometry: geometryParameter,
  onsite: onsiteParameter,
  random: randomParameter,
});

type Request = SystemRequest<z.infer<typeof parameters>>;

const particlesOf = ({ size, parameters: { particles } }: Request): number => (particles === 'half' ? Math.floor(size / 2) : particles);

function basis({ size, coupling, disorder, parameters }: Request): ProductBasis {
  const { J, geometry, onsite, random, 'next-J': nextJ, 'next-V': nextV } = parameters;
  const energies = siteEnergies(onsite, random === 'hops' ? null : disorder, size);
  const near = bonds(size, geometry);
  const far = nextNeighbours(size, geometry);
  const farHops = nextJ === 0 ? [] : far;
  const hops = [
    { pairs: near, amplitudes: termAmplitudes(-J, disorder, random, near.length, 'near') },
    { pairs: farHops, amplitudes: termAmplitudes(-nextJ, disorder, random, farHops.length, 'next') },
  ];
  const interactions = [
    { pairs: near, V: coupling },
    { pairs: far, V: nextV },
  ];
  return {
    sites: size,
    levels: 2,
    diagonal(n) {
      let energy = 0;
      for (let x = 0; x < size; x += 1) energy += energies[x] * n[x];
      for (const { pairs, V } of interactions) for (const [x, y] of pairs) energy += V * n[x] * n[y];
      return energy;
    },
    connect(n, emit) {
      for (const { pairs, amplitudes } of hops) {
        for (let b = 0; b < pairs.length; b += 1) {
          const [x, y] = pairs[b];
          if (n[x] === n[y]) continue;
          // Sites are ordered 1 … L: a hop changes sign with every fermion it passes.
          let sign = 1;
          for (let z = Math.min(x, y) + 1; z < Math.max(x, y); z += 1) if (n[z] === 1) sign = -sign;
          [n[x], n[y]] = [n[y], n[x]];
          emit(sign * amplitudes[b]);
          [n[x], n[y]] = [n[y], n[x]];
        }
      }
    },
  };
}

/** Fermions on the first so many of the given sites; null where there are more fermions than sites. */
function filled(request: Request, order: readonly number[]): readonly Term[] | null {
  if (particlesOf(request) > order.length) return null;
  const chosen = new Set(order.slice(0, particlesOf(request)));
  return basisState(Array.from({ length: request.size }, (_, x) => (chosen.has(x) ? 1 : 0)));
}

const sitesOf = (size: number): number[] => Array.from({ length: size }, (_, x) => x);

/**
 * H = −J Σ (c†_x c_{x+1} + h.c.) − J₂ Σ (c†_x c_{x+2} + h.c.) + V Σ n_x n_{x+1} + V₂ Σ n_x n_{x+2} + Σ ε_x n_x at fixed N, each pair once.
 * With V = V₂ = 0 the levels are sums of N levels of one particle (E_k = −2J cos k − 2J₂ cos 2k on a uniform ring).
 */
export const fermionChain = defineProductFamily<z.infer<typeof parameters>>({
  name: 'fermion-chain',
  summary:
    'Spinless fermions: H = −J Σ_x (c†_x c_{x+1} + h.c.) − J₂ Σ_x (c†_x c_{x+2} + h.c.) + V Σ_x n_x n_{x+1} + V₂ Σ_x n_x n_{x+2} + Σ_x ε_x n_x.',
  source:
    'Localization of interacting fermions at high temperature, Phys. Rev. B 75, 155111 (2007), DOI 10.1103/PhysRevB.75.155111 (from memory)',
  energyUnit: 'that of V and J, usually J = 1',
  size: { symbol: 'L', meaning: 'number of sites', minimum: 1, maximum: 256 },
  coupling: { symbol: 'V', meaning: 'interaction energy of two fermions on neighbouring sites' },
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
  complete: (given, size) => ({ ...given, particles: given.particles === 'half' ? Math.floor(size / 2) : given.particles }),
  states: [
    {
      name: 'density-wave',
      meaning: 'fermions on sites 1, 3, 5, … from the left',
      needs: 'at most one fermion for every other site',
      terms: (request) =>
        filled(
          request,
          sitesOf(request.size).filter((x) => x % 2 === 0),
        ),
    },
    { name: 'domain-wall', meaning: 'the leftmost sites filled', terms: (request) => filled(request, sitesOf(request.size)) },
    { name: 'all-right', meaning: 'the rightmost sites filled', terms: (request) => filled(request, sitesOf(request.size).reverse()) },
  ],
  checkParameters(request) {
    checkOnsite(request.parameters.onsite, request.size);
    if (particlesOf(request) > request.size)
      throw refusal(
        'model.parameter',
        'there are more fermions than sites',
        'parameters.particles',
        particlesOf(request),
        `at most ${request.size}`,
      );
  },
  labels: (request) => occupationLabels({ sites: request.size, levels: 2, total: particlesOf(request), unit: 'fermions' }),
  rule: (request) => totalRule(request.size, 2, particlesOf(request)),
  hilbertDimension: (request) => binomial(request.size, particlesOf(request)),
  moves: ({ size, parameters: { geometry } }) => bonds(size, geometry).length + nextNeighbours(size, geometry).length,
  basis,
});
