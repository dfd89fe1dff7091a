/** Ising chain in a transverse and a longitudinal field. */
import { z } from 'zod';
import { freeRule } from './configuration-space.js';
import { localLabels } from './labels.js';
import { bonds, checkOnsite, fieldParameter, geometryParameter, siteEnergies, windows } from './lattice.js';
import { halves, localMoves, repeated } from './local-moves.js';
import { defineProductFamily } from './product-family.js';
import { refusal } from './refusal.js';
import type { ProductBasis, SystemRequest } from './types.js';

const SPINS = 'du';

const parameters = z.strictObject({
  J: z.number().default(1).describe('Ising coupling between neighbours; ferromagnetic for J > 0'),
  geometry: geometryParameter,
  field: fieldParameter,
});

type Request = SystemRequest<z.infer<typeof parameters>>;

function basis({ size, coupling, disorder, parameters: { J, geometry, field } }: Request): ProductBasis {
  const fields = siteEnergies(field, disorder, size);
  const pairs = bonds(size, geometry);
  const spins = windows(size, 1, 'line');
  return {
    sites: size,
    levels: 2,
    diagonal(c) {
      let energy = 0;
      for (let x = 0; x < size; x += 1) energy -= fields[x] * (2 * c[x] - 1);
      for (const [x, y] of pairs) energy -= c[x] === c[y] ? J : -J;
      return energy;
    },
    connect: localMoves(SPINS, [{ windows: spins, amplitudes: new Float64Array(size).fill(-coupling), moves: [['u', 'd']] }]),
  };
}

/**
 * H = −J Σ σz_x σz_{x+1} − g Σ σx_x − Σ h_x σz_x, each bond once. On a ring without longitudinal field E_0 = −½ Σ_k ε_k over
 * k = (2m + 1)π/L, ε_k = 2√(J² + g² − 2Jg cos k). Values: 0 down, 1 up.
 */
export const isingChain = defineProductFamily<z.infer<typeof parameters>>({
  name: 'ising-chain',
  summary: 'Transverse- and mixed-field Ising chain: H = −J Σ_x σz_x σz_{x+1} − g Σ_x σx_x − Σ_x h_x σz_x, each bond once.',
  source:
    'The one-dimensional Ising model with a transverse field, Ann. Phys. 57, 79 (1970), DOI 10.1016/0003-4916(70)90270-8 (from memory)',
  energyUnit: 'that of the Ising coupling J, usually J = 1',
  size: { symbol: 'L', meaning: 'number of spins', minimum: 1, maximum: 64 },
  coupling: { symbol: 'g', meaning: 'transverse field' },
  scales: [
    { name: 'g', meaning: 'the transverse field itself', toCoupling: (value) => value },
    {
      name: 'g/J',
      meaning: 'transverse field in units of the Ising coupling; the transition of the ground state is at 1',
      toCoupling(value, _size, { J }) {
        if (J === 0 || typeof J !== 'number')
          throw refusal('model.coupling', 'g/J is not defined without an Ising coupling', 'parameters.J', J, 'J ≠ 0, or the scale g');
        return J * value;
      },
    },
  ],
  parameters,
  disordered: true,
  states: [
    { name: 'all-up', meaning: 'all spins up', terms: ({ size }) => repeated(SPINS, size, 'u') },
    { name: 'all-down', meaning: 'all spins down', terms: ({ size }) => repeated(SPINS, size, 'd') },
    { name: 'neel', meaning: 'up on sites 1, 3, 5, …, down on the others', terms: ({ size }) => repeated(SPINS, size, 'ud') },
    { name: 'domain-wall', meaning: 'the left half up, the right half down', terms: ({ size }) => halves(SPINS, size, 'u', 'd') },
  ],
  checkParameters: ({ size, parameters: { field } }) => checkOnsite(field, size, 'field'),
  labels: ({ size }) => localLabels(size, SPINS),
  rule: ({ size }) => freeRule(size, 2),
  hilbertDimension: ({ size }) => 2 ** size,
  moves: ({ size }) => size,
  basis,
});
