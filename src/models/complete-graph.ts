/** One particle that hops between any two vertices, with or without a marked one: the simplest search. */
import { z } from 'zod';
import { freeRule } from './configuration-space.js';
import { positionLabels } from './labels.js';
import { defineProductFamily } from './product-family.js';
import { basisState } from './states.js';

const parameters = z.strictObject({
  oracle: z.number().default(0).describe('energy by which the marked vertex (site 1) lies lower: − oracle |1><1|'),
});

/**
 * H = −g Σ_{x≠y} |x><y| − oracle |1><1|. Without oracle the levels are −g(N − 1) and g, with N − 1 of the latter. With g = 1/N and
 * oracle 1 H is the analog search up to a constant: levels −1 ± 1/√N + 1/N that the start state reaches.
 */
export const completeGraph = defineProductFamily<z.infer<typeof parameters>>({
  name: 'complete-graph',
  summary: 'Walk on the complete graph: H = −g Σ_{x≠y} |x><y| − oracle |1><1|.',
  source:
    'Dark states of quantum search cause imperfect detection, Phys. Rev. Research 2, 043107 (2020), DOI 10.1103/PhysRevResearch.2.043107; search: ' +
    'Analog analogue of a digital quantum computation, Phys. Rev. A 57, 2403 (1998), DOI 10.1103/PhysRevA.57.2403 (from memory)',
  energyUnit: 'that of the hopping g',
  size: { symbol: 'N', meaning: 'number of vertices', minimum: 2, maximum: 4096 },
  coupling: { symbol: 'g', meaning: 'hopping amplitude between any two vertices' },
  scales: [
    { name: 'g', meaning: 'the hopping amplitude itself', toCoupling: (value) => value },
    {
      name: 'N g',
      meaning: 'amplitude times the number of vertices; the best search is at N g = oracle',
      toCoupling: (value, size) => value / size,
    },
  ],
  parameters,
  disordered: false,
  states: [
    { name: 'first', meaning: 'the particle on site 1, the marked vertex', terms: () => basisState([0]) },
    { name: 'last', meaning: 'the particle on site N', terms: ({ size }) => basisState([size - 1]) },
  ],
  labels: ({ size }) => positionLabels(size),
  rule: ({ size }) => freeRule(1, size),
  hilbertDimension: ({ size }) => size,
  moves: ({ size }) => size - 1,
  basis: ({ size, coupling, parameters: { oracle } }) => ({
    sites: 1,
    levels: size,
    diagonal: ([x]) => (x === 0 ? -oracle : 0),
    connect(position, emit) {
      const x = position[0];
      for (let y = 0; y < size; y += 1) {
        if (y === x) continue;
        position[0] = y;
        emit(-coupling);
      }
      position[0] = x;
    },
  }),
});
