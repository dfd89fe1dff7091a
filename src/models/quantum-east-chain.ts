/** Spins that flip only beside an excited neighbour on their left. */
import { z } from 'zod';
import { freeRule } from './configuration-space.js';
import { localLabels } from './labels.js';
import { checkOnsite, geometryParameter, onsiteParameter, randomParameter, siteEnergies, termAmplitudes, windows } from './lattice.js';
import { localMoves, repeated } from './local-moves.js';
import { defineProductFamily } from './product-family.js';
import { basisState } from './states.js';
import type { ProductBasis, SystemRequest } from './types.js';

const STATES = '01';

const parameters = z.strictObject({ geometry: geometryParameter, onsite: onsiteParameter, random: randomParameter });

type Request = SystemRequest<z.infer<typeof parameters>>;

function basis({ size, coupling, disorder, parameters: { geometry, onsite, random } }: Request): ProductBasis {
  const energies = siteEnergies(onsite, random === 'hops' ? null : disorder, size);
  const pairs = windows(size, 2, geometry);
  const constrained = new Set(pairs.map(([x]) => x));
  return {
    sites: size,
    levels: 2,
    diagonal(c) {
      let energy = 0;
      for (let x = 0; x < size; x += 1) energy += c[x] * (energies[x] + (constrained.has(x) ? 0.5 : 0));
      return energy;
    },
    connect: localMoves(STATES, [
      { windows: pairs, amplitudes: termAmplitudes(-Math.exp(-coupling) / 2, disorder, random, pairs.length), moves: [['10', '11']] },
    ]),
  };
}

/**
 * H = −½ Σ n_x (e^{−s} σx_{x+1} − 1) + Σ ε_x n_x, the sum over neighbours (x, x + 1). On a line the first excited site is conserved: L sectors
 * of 2^{L−1}, …, 2, 1 configurations, and the vacuum. At s = 0 H is the generator of the classical East model.
 */
export const quantumEastChain = defineProductFamily<z.infer<typeof parameters>>({
  name: 'quantum-east-chain',
  summary: 'Quantum East model: H = −½ Σ_x n_x (e^{−s} σx_{x+1} − 1) + Σ_x ε_x n_x; a spin flips only right of an excited one.',
  source:
    'Quantum East model: localization, nonthermal eigenstates, and slow dynamics, Phys. Rev. X 10, 021051 (2020), DOI 10.1103/PhysRevX.10.021051 ' +
    '(from memory)',
  energyUnit: 'that of H, whose constrained terms have the prefactor ½',
  size: { symbol: 'L', meaning: 'number of sites', minimum: 2, maximum: 64 },
  coupling: { symbol: 's', meaning: 'bias: flips are suppressed by e^{−s}; the ground state localises for s > 0' },
  scales: [{ name: 's', meaning: 'the bias itself', toCoupling: (value) => value }],
  parameters,
  disordered: true,
  states: [
    {
      name: 'seed',
      meaning: 'site 1 excited, the others not',
      terms: ({ size }) => basisState(Array.from({ length: size }, (_, x) => (x === 0 ? 1 : 0))),
    },
    { name: 'all-excited', meaning: 'every site excited', terms: ({ size }) => repeated(STATES, size, '1') },
    { name: 'vacuum', meaning: 'no site excited: frozen', terms: ({ size }) => repeated(STATES, size, '0') },
  ],
  checkParameters: ({ size, parameters: { onsite } }) => checkOnsite(onsite, size),
  labels: ({ size }) => localLabels(size, STATES),
  rule: ({ size }) => freeRule(size, 2),
  hilbertDimension: ({ size }) => 2 ** size,
  moves: ({ size }) => size,
  basis,
});
