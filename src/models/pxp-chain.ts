/** Chain whose spins flip only between two spins that are down: strong Rydberg blockade. */
import { z } from 'zod';
import { freeRule } from './configuration-space.js';
import type { ConfigurationRule } from './configuration-space.js';
import { localLabels } from './labels.js';
import { checkOnsite, geometryParameter, onsiteParameter, randomParameter, siteEnergies, termAmplitudes, windows } from './lattice.js';
import { localMoves, repeated } from './local-moves.js';
import type { LocalTerm } from './local-moves.js';
import { defineProductFamily } from './product-family.js';
import { basisState } from './states.js';
import type { ProductBasis, SystemRequest } from './types.js';

const STATES = '01';

const parameters = z.strictObject({
  omega: z.number().default(1).describe('amplitude Ω of a flip'),
  space: z
    .enum(['blockade', 'full'])
    .default('blockade')
    .describe('blockade: configurations without neighbouring excitations; full: all 2^L, in which excited neighbours never move'),
  geometry: geometryParameter,
  onsite: onsiteParameter,
  random: randomParameter,
});

type Parameters = z.infer<typeof parameters>;
type Request = SystemRequest<Parameters>;

/** A ring of two sites is a line: its sites are neighbours once. */
const isRing = ({ size, parameters: { geometry } }: Request): boolean => geometry === 'ring' && size > 2;

function flips(request: Request): LocalTerm[] {
  const { size, disorder, parameters } = request;
  const { omega, random, geometry } = parameters;
  const inner = windows(size, 3, geometry);
  const bulk: LocalTerm = {
    windows: inner,
    amplitudes: termAmplitudes(omega, disorder, random, inner.length),
    moves: [['000', '010']],
  };
  if (isRing(request)) return [bulk];
  // The ends have one neighbour.
  const ends: LocalTerm = {
    windows: [
      [0, 1],
      [size - 1, size - 2],
    ],
    amplitudes: termAmplitudes(omega, disorder, random, 2, 'ends'),
    moves: [['00', '10']],
  };
  return [bulk, ends];
}

function basis(request: Request): ProductBasis {
  const { size, coupling, disorder, parameters } = request;
  const energies = siteEnergies(parameters.onsite, parameters.random === 'hops' ? null : disorder, size);
  return {
    sites: size,
    levels: 2,
    diagonal(c) {
      let energy = 0;
      for (let x = 0; x < size; x += 1) energy += c[x] * (energies[x] - coupling);
      return energy;
    },
    connect: localMoves(STATES, flips(request)),
  };
}

/** Remembers the first and the last value read. */
function blockadeRule(size: number, ring: boolean): ConfigurationRule {
  return {
    sites: size,
    levels: 2,
    start: [0, 0],
    step: ([first, last], value, site) => (last === 1 && value === 1 ? null : [site === 0 ? value : first, value]),
    finish: ([first, last]) => (ring && first === 1 && last === 1 ? null : []),
  };
}

/**
 * H = Ω Σ P_{x−1} X_x P_{x+1} − δ Σ n_x + Σ ε_x n_x, P = 1 − n; the ends of a line have one neighbour. The blockade space has F_{L+2}
 * (line; Fibonacci, F_1 = F_2 = 1) or F_{L−1} + F_{L+1} (ring) configurations.
 */
export const pxpChain = defineProductFamily<Parameters>({
  name: 'pxp-chain',
  summary: 'Blockade-constrained flips: H = Ω Σ_x P_{x−1} X_x P_{x+1} − δ Σ_x n_x + Σ_x ε_x n_x, with P = 1 − n.',
  source:
    'Weak ergodicity breaking from quantum many-body scars, Nat. Phys. 14, 745 (2018), DOI 10.1038/s41567-018-0137-5 (from memory); with ' +
    'detuning: Competing density-wave orders in a one-dimensional hard-boson model, Phys. Rev. B 69, 075106 (2004), DOI 10.1103/PhysRevB.69.075106 (from memory)',
  energyUnit: 'that of the flip amplitude Ω, usually Ω = 1',
  size: { symbol: 'L', meaning: 'number of sites', minimum: 2, maximum: 64 },
  coupling: { symbol: 'δ', meaning: 'detuning: energy gained by an excitation' },
  scales: [{ name: 'δ', meaning: 'the detuning itself', toCoupling: (value) => value }],
  parameters,
  disordered: true,
  states: [
    { name: 'vacuum', meaning: 'no excitation', terms: ({ size }) => repeated(STATES, size, '0') },
    {
      name: 'neel',
      meaning: 'excitations on sites 1, 3, 5, …',
      needs: 'an even number of sites, or a line',
      terms: (request) => (isRing(request) && request.size % 2 === 1 ? null : repeated(STATES, request.size, '10')),
    },
    {
      name: 'period-three',
      meaning: 'excitations on sites 1, 4, 7, …',
      needs: 'a line, or a number of sites that is a multiple of three',
      terms: (request) => (isRing(request) && request.size % 3 !== 0 ? null : repeated(STATES, request.size, '100')),
    },
    {
      name: 'single',
      meaning: 'one excitation in the middle',
      terms: ({ size }) => basisState(Array.from({ length: size }, (_, x) => (x === Math.ceil(size / 2) - 1 ? 1 : 0))),
    },
  ],
  checkParameters: ({ size, parameters: { onsite } }) => checkOnsite(onsite, size),
  labels: ({ size }) => localLabels(size, STATES),
  rule: (request) => (request.parameters.space === 'full' ? freeRule(request.size, 2) : blockadeRule(request.size, isRing(request))),
  moves: ({ size }) => size,
  basis,
});
