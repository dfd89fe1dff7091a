/** Electrons that hop without double occupancy and interact along the axis: spins keep their order. */
import { z } from 'zod';
import { chargeRule } from './configuration-space.js';
import { localLabels } from './labels.js';
import { bonds, checkOnsite, geometryParameter, onsiteParameter, randomParameter, siteEnergies, termAmplitudes } from './lattice.js';
import { localMoves, repeated } from './local-moves.js';
import { defineProductFamily } from './product-family.js';
import { basisState } from './states.js';
import type { ProductBasis, SystemRequest } from './types.js';

/** empty, up, down */
const STATES = '0ud';

const parameters = z.strictObject({
  t: z.number().default(1).describe('hopping amplitude between neighbours'),
  statistics: z
    .enum(['fermions', 'hard-core'])
    .default('fermions')
    .describe('fermions: on a ring, a hop over the closing bond carries (−1)^(N−1); hard-core: it does not. A line is the same for both'),
  geometry: geometryParameter,
  onsite: onsiteParameter,
  field: z.number().default(0).describe('uniform field h on the spins: + h Σ_x Sᶻ_x'),
  random: randomParameter,
});

type Request = SystemRequest<z.infer<typeof parameters>>;

const spin = (value: number): number => (value === 0 ? 0 : 1.5 - value);

function basis({ size, coupling, disorder, parameters: { t, statistics, geometry, onsite, field, random } }: Request): ProductBasis {
  const energies = siteEnergies(onsite, random === 'hops' ? null : disorder, size);
  const pairs = bonds(size, geometry);
  const amplitudes = termAmplitudes(-t, disorder, random, pairs.length);
  const inner = pairs.filter(([x, y]) => y === x + 1);
  const hops = (windows: typeof pairs) =>
    localMoves(STATES, [
      {
        windows,
        amplitudes: windows.map((pair) => amplitudes[pairs.indexOf(pair)]),
        moves: [
          ['u0', '0u'],
          ['d0', '0d'],
        ],
      },
    ]);
  const along = hops(inner);
  const around = hops(pairs.filter((pair) => !inner.includes(pair)));
  return {
    sites: size,
    levels: 3,
    diagonal(c) {
      let energy = 0;
      for (let x = 0; x < size; x += 1) if (c[x] !== 0) energy += energies[x] + field * spin(c[x]);
      for (const [x, y] of pairs) energy += coupling * spin(c[x]) * spin(c[y]);
      return energy;
    },
    connect(c, emit) {
      along(c, emit);
      // A fermion that leaves one end for the other passes all the others.
      let sign = -1;
      for (const value of c) if (value !== 0) sign = -sign;
      around(c, statistics === 'fermions' ? (amplitude) => emit(sign * amplitude) : emit);
    },
  };
}

/**
 * H = −t Σ_{x,σ} (c†_{xσ} c_{x+1,σ} + h.c.) + J_z Σ S^z_x S^z_{x+1} + Σ ε_x n_x + h Σ S^z_x without double occupancy, each bond once.
 * Conserves the numbers of up and down spins; on a line also their order, so that the whole space falls into 2^(L+1) − 1 sectors. Values:
 * 0 empty, 1 up, 2 down.
 */
export const tJzChain = defineProductFamily<z.infer<typeof parameters>>({
  name: 't-jz-chain',
  summary:
    't–Jz chain: H = −t Σ_{x,σ} (c†_{xσ} c_{x+1,σ} + h.c.) + Jz Σ_x Sᶻ_x Sᶻ_{x+1} + Σ_x (ε_x n_x + h Sᶻ_x), no site doubly occupied.',
  source:
    'Statistical localization: from strong fragmentation to strong edge modes, Phys. Rev. B 101, 125126 (2020), DOI 10.1103/PhysRevB.101.125126; ' +
    'Hilbert space fragmentation and commutant algebras, Phys. Rev. X 12, 011050 (2022), DOI 10.1103/PhysRevX.12.011050',
  energyUnit: 'that of the hopping t, usually t = 1',
  size: { symbol: 'L', meaning: 'number of sites', minimum: 2, maximum: 40 },
  coupling: { symbol: 'Jz', meaning: 'Ising coupling between neighbouring spins' },
  scales: [{ name: 'Jz', meaning: 'the Ising coupling itself', toCoupling: (value) => value }],
  parameters,
  disordered: true,
  states: [
    {
      name: 'pair-left',
      meaning: 'up on site 1, down on site 2, the rest empty',
      terms: ({ size }) => basisState(Array.from({ length: size }, (_, x) => (x < 2 ? x + 1 : 0))),
    },
    {
      name: 'dilute-neel',
      meaning: 'every other site filled, up and down by turns: u 0 d 0 …',
      terms: ({ size }) => repeated(STATES, size, 'u0d0'),
    },
    {
      name: 'packed-left',
      meaning: 'the left half filled, up and down by turns, the right half empty',
      terms: ({ size }) => basisState(Array.from({ length: size }, (_, x) => (2 * x < size ? 1 + (x % 2) : 0))),
    },
    { name: 'empty', meaning: 'no electron', terms: ({ size }) => repeated(STATES, size, '0') },
  ],
  checkParameters: ({ size, parameters: { onsite } }) => checkOnsite(onsite, size),
  labels: ({ size }) => localLabels(size, STATES),
  rule: ({ size }) => chargeRule(size, 3, (value) => [value === 1 ? 1 : 0, value === 2 ? 1 : 0]),
  moves: ({ size, parameters: { geometry } }) => bonds(size, geometry).length,
  fragmented: true,
  basis,
});
