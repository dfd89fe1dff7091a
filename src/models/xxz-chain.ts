/** Spin-half chains with exchange along the axis and in the plane, to nearest and next neighbours, in a field. */
import { z } from 'zod';
import { chargeRule } from './configuration-space.js';
import { localLabels } from './labels.js';
import {
  bonds,
  checkOnsite,
  fieldParameter,
  geometryParameter,
  nextNeighbours,
  randomParameter,
  siteEnergies,
  termAmplitudes,
} from './lattice.js';
import { halves, localMoves, repeated } from './local-moves.js';
import { defineProductFamily } from './product-family.js';
import { basisState } from './states.js';
import type { ProductBasis, SystemRequest } from './types.js';

const SPINS = 'du';

const parameters = z.strictObject({
  J: z.number().default(1).describe('exchange between nearest neighbours; antiferromagnetic for J > 0'),
  'next-J': z.number().default(0).describe('exchange J₂ between next neighbours, with the same anisotropy'),
  geometry: geometryParameter,
  field: fieldParameter,
  random: randomParameter,
});

type Request = SystemRequest<z.infer<typeof parameters>>;

function basis({ size, coupling, disorder, parameters: { J, geometry, field, random, 'next-J': next } }: Request): ProductBasis {
  const fields = siteEnergies(field, random === 'hops' ? null : disorder, size);
  const near = bonds(size, geometry);
  const far = next === 0 ? [] : nextNeighbours(size, geometry);
  const pairs = [...near.map(([x, y]) => [x, y, J] as const), ...far.map(([x, y]) => [x, y, next] as const)];
  const exchange = (windows: typeof near, amplitude: number, kind: string) => ({
    windows,
    amplitudes: termAmplitudes(amplitude, disorder, random, windows.length, kind),
    moves: [['ud', 'du', 0.5]] as const,
  });
  return {
    sites: size,
    levels: 2,
    diagonal(c) {
      let energy = 0;
      for (let x = 0; x < size; x += 1) energy += fields[x] * (c[x] - 0.5);
      for (const [x, y, amplitude] of pairs) energy += amplitude * coupling * (c[x] - 0.5) * (c[y] - 0.5);
      return energy;
    },
    connect: localMoves(SPINS, [exchange(near, J, 'near'), exchange(far, next, 'next')]),
  };
}

/**
 * H = J Σ (S^x_x S^x_{x+1} + S^y_x S^y_{x+1} + Δ S^z_x S^z_{x+1}) + J₂ Σ (the same for x, x+2) + Σ h_x S^z_x, S = σ/2, each pair once.
 * Conserves the number of up spins; D = C(L, up) of φ. Values: 0 down, 1 up. Random hops add to the exchange in the plane only.
 */
export const xxzChain = defineProductFamily<z.infer<typeof parameters>>({
  name: 'xxz-chain',
  summary: 'Spin-half XXZ chain: H = Σ J_r (SˣSˣ + SʸSʸ + Δ SᶻSᶻ) over neighbours (J) and next neighbours (J₂) + Σ_x h_x Sᶻ_x.',
  source:
    'Linear magnetic chains with anisotropic coupling, Phys. Rev. 135, A640 (1964), DOI 10.1103/PhysRev.135.A640 (from memory); random fields: ' +
    'Many-body localization in the Heisenberg XXZ magnet in a random field, Phys. Rev. B 77, 064426 (2008), DOI 10.1103/PhysRevB.77.064426 (from memory)',
  energyUnit: 'that of the exchange J, usually J = 1',
  size: { symbol: 'L', meaning: 'number of spins', minimum: 1, maximum: 64 },
  coupling: { symbol: 'Δ', meaning: 'anisotropy: exchange along the axis over exchange in the plane; 1 is the Heisenberg chain' },
  scales: [{ name: 'Δ', meaning: 'the anisotropy itself', toCoupling: (value) => value }],
  parameters,
  disordered: true,
  states: [
    { name: 'neel', meaning: 'up on sites 1, 3, 5, …, down on the others', terms: ({ size }) => repeated(SPINS, size, 'ud') },
    { name: 'domain-wall', meaning: 'the left half up, the right half down', terms: ({ size }) => halves(SPINS, size, 'u', 'd') },
    { name: 'all-up', meaning: 'all spins up', terms: ({ size }) => repeated(SPINS, size, 'u') },
    {
      name: 'magnon',
      meaning: 'one spin up in the middle of down spins (of an even number the left of the two)',
      terms: ({ size }) => basisState(Array.from({ length: size }, (_, x) => (x === Math.ceil(size / 2) - 1 ? 1 : 0))),
    },
  ],
  checkParameters: ({ size, parameters: { field } }) => checkOnsite(field, size, 'field'),
  labels: ({ size }) => localLabels(size, SPINS),
  rule: ({ size }) => chargeRule(size, 2, (value) => [value]),
  moves: ({ size, parameters: { geometry } }) => bonds(size, geometry).length + nextNeighbours(size, geometry).length,
  basis,
});
