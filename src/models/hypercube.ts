/** One particle on the corners of an n-dimensional cube, with or without a marked corner. */
import { z } from 'zod';
import { freeRule } from './configuration-space.js';
import { localLabels } from './labels.js';
import { windows } from './lattice.js';
import { localMoves, repeated } from './local-moves.js';
import { defineProductFamily } from './product-family.js';

const BITS = '01';

const parameters = z.strictObject({
  oracle: z.number().default(0).describe('energy by which the marked corner 00…0 lies lower'),
});

/**
 * H = −g Σ_x X_x − oracle |0…0><0…0| on words of n bits. Without oracle the levels are −g(n − 2k), k = 0 … n, each C(n, k) times, and every
 * corner reaches all n + 1.
 */
export const hypercube = defineProductFamily<z.infer<typeof parameters>>({
  name: 'hypercube',
  summary: 'Walk on the n-cube: H = −g Σ_x X_x − oracle |0…0><0…0|.',
  source:
    'Quantum walks with infinite hitting times, Phys. Rev. A 74, 042334 (2006), DOI 10.1103/PhysRevA.74.042334; Hitting time for quantum walks on ' +
    'the hypercube, Phys. Rev. A 73, 032341 (2006), DOI 10.1103/PhysRevA.73.032341',
  energyUnit: 'that of the hopping g',
  size: { symbol: 'n', meaning: 'dimension of the cube, which has 2^n corners', minimum: 1, maximum: 32 },
  coupling: { symbol: 'g', meaning: 'hopping amplitude along an edge' },
  scales: [{ name: 'g', meaning: 'the hopping amplitude itself', toCoupling: (value) => value }],
  parameters,
  disordered: false,
  states: [
    { name: 'origin', meaning: 'the corner 00…0, the marked one', terms: ({ size }) => repeated(BITS, size, '0') },
    { name: 'antipode', meaning: 'the opposite corner 11…1', terms: ({ size }) => repeated(BITS, size, '1') },
  ],
  labels: ({ size }) => localLabels(size, BITS),
  rule: ({ size }) => freeRule(size, 2),
  hilbertDimension: ({ size }) => 2 ** size,
  moves: ({ size }) => size,
  basis: ({ size, coupling, parameters: { oracle } }) => ({
    sites: size,
    levels: 2,
    diagonal: (c) => (c.every((bit) => bit === 0) ? -oracle : 0),
    connect: localMoves(BITS, [
      { windows: windows(size, 1, 'line'), amplitudes: new Float64Array(size).fill(-coupling), moves: [['0', '1']] },
    ]),
  }),
});
