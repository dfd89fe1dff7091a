/** Two coupled levels: the smallest system, with closed forms for every statistic. */
import { z } from 'zod';
import { defineFamily } from './family.js';
import { positionLabels } from './labels.js';
import { basisState } from './states.js';
import { tridiagonalSector } from './tridiagonal-sector.js';

const parameters = z.strictObject({
  bias: z.number().default(0).describe('energy of up minus energy of down'),
});

/** H = −g σx + (bias/2) σz in the basis (up, down) = (site 1, site 2); levels ±√(g² + bias²/4). */
export const twoLevel = defineFamily<z.infer<typeof parameters>>({
  name: 'two-level',
  summary: 'One particle on two levels: H = −g σx + (bias/2) σz, with up = site 1 and down = site 2.',
  source: 'Quantum walks: the first detected passage time problem, Phys. Rev. E 95, 032141 (2017), DOI 10.1103/PhysRevE.95.032141',
  energyUnit: 'that of the coupling g',
  size: { symbol: 'D', meaning: 'number of levels', minimum: 2, maximum: 2 },
  coupling: { symbol: 'g', meaning: 'tunnelling amplitude between the two levels' },
  scales: [{ name: 'g', meaning: 'the tunnelling amplitude itself', toCoupling: (value) => value }],
  parameters,
  disordered: false,
  states: [
    { name: 'up', meaning: 'the upper level of a positive bias (site 1)', terms: () => basisState([0]) },
    { name: 'down', meaning: 'the other level (site 2)', terms: () => basisState([1]) },
    { name: 'plus', meaning: '(up + down)/√2', terms: () => [...basisState([0]), ...basisState([1])] },
    { name: 'minus', meaning: '(up − down)/√2', terms: () => [...basisState([0]), { label: [1], re: -1, im: 0 }] },
  ],
  labels: () => positionLabels(2),
  hilbertDimension: () => 2,
  extent: () => ({ hilbertDimension: 2, dimension: 2, nonzeros: 4, storage: 'tridiagonal', complex: false }),
  sector: ({ coupling, parameters: { bias } }, support) =>
    tridiagonalSector(
      Float64Array.of(bias / 2, -bias / 2),
      Float64Array.of(-coupling),
      support.map(([row]) => row),
    ),
});
