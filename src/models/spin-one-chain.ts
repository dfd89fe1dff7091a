/** Spin-one chain with anisotropic exchange and single-ion anisotropy. */
import { z } from 'zod';
import { chargeRule } from './configuration-space.js';
import { localLabels } from './labels.js';
import { bonds, checkOnsite, fieldParameter, geometryParameter, randomParameter, siteEnergies, termAmplitudes } from './lattice.js';
import { halves, localMoves, repeated } from './local-moves.js';
import { defineProductFamily } from './product-family.js';
import type { ProductBasis, SystemRequest } from './types.js';

const SPINS = '-0+';

const parameters = z.strictObject({
  J: z.number().default(1).describe('exchange between neighbours; antiferromagnetic for J > 0'),
  anisotropy: z.number().default(1).describe('exchange along the axis over exchange in the plane, Δ'),
  geometry: geometryParameter,
  field: fieldParameter,
  random: randomParameter,
});

type Request = SystemRequest<z.infer<typeof parameters>>;

function basis({ size, coupling, disorder, parameters: { J, anisotropy, geometry, field, random } }: Request): ProductBasis {
  const fields = siteEnergies(field, random === 'hops' ? null : disorder, size);
  const pairs = bonds(size, geometry);
  return {
    sites: size,
    levels: 3,
    diagonal(c) {
      let energy = 0;
      for (let x = 0; x < size; x += 1) energy += fields[x] * (c[x] - 1) + coupling * (c[x] - 1) ** 2;
      for (const [x, y] of pairs) energy += J * anisotropy * (c[x] - 1) * (c[y] - 1);
      return energy;
    },
    // (S⁺S⁻ + h.c.)/2 has the element √2·√2/2 = 1 for every move.
    connect: localMoves(SPINS, [
      {
        windows: pairs,
        amplitudes: termAmplitudes(J, disorder, random, pairs.length),
        moves: [
          ['+-', '00'],
          ['00', '-+'],
          ['+0', '0+'],
          ['0-', '-0'],
        ],
      },
    ]),
  };
}

/**
 * H = J Σ (S^x S^x + S^y S^y + Δ S^z S^z) + D Σ (S^z_x)² + Σ h_x S^z_x with spins of length one, each bond once. Conserves Σ S^z; the
 * dimension counts the configurations with that of φ. Values: 0, 1, 2 for S^z = −1, 0, 1.
 */
export const spinOneChain = defineProductFamily<z.infer<typeof parameters>>({
  name: 'spin-one-chain',
  summary: 'Spin-one chain: H = J Σ_x (SˣSˣ + SʸSʸ + Δ SᶻSᶻ)_{x,x+1} + D Σ_x (Sᶻ_x)² + Σ_x h_x Sᶻ_x, each bond once.',
  source:
    'Nonlinear field theory of large-spin Heisenberg antiferromagnets: semiclassically quantized solitons of the one-dimensional easy-axis ' +
    'Néel state, Phys. Rev. Lett. 50, 1153 (1983), DOI 10.1103/PhysRevLett.50.1153 (from memory)',
  energyUnit: 'that of the exchange J, usually J = 1',
  size: { symbol: 'L', meaning: 'number of spins', minimum: 1, maximum: 40 },
  coupling: { symbol: 'D', meaning: 'single-ion anisotropy; D > 0 favours Sᶻ = 0' },
  scales: [{ name: 'D', meaning: 'the single-ion anisotropy itself', toCoupling: (value) => value }],
  parameters,
  disordered: true,
  states: [
    { name: 'neel', meaning: '+ on sites 1, 3, 5, …, − on the others', terms: ({ size }) => repeated(SPINS, size, '+-') },
    { name: 'all-zero', meaning: 'every spin in Sᶻ = 0', terms: ({ size }) => repeated(SPINS, size, '0') },
    { name: 'domain-wall', meaning: 'the left half +, the right half −', terms: ({ size }) => halves(SPINS, size, '+', '-') },
    { name: 'all-up', meaning: 'every spin in Sᶻ = 1', terms: ({ size }) => repeated(SPINS, size, '+') },
  ],
  checkParameters: ({ size, parameters: { field } }) => checkOnsite(field, size, 'field'),
  labels: ({ size }) => localLabels(size, SPINS),
  rule: ({ size }) => chargeRule(size, 3, (value) => [value]),
  moves: ({ size, parameters: { geometry } }) => 2 * bonds(size, geometry).length,
  basis,
});
