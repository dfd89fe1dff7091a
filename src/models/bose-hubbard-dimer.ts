/** Bosons in a double well: the two-mode Bose–Hubbard model (bosonic Josephson junction). */
import { z } from 'zod';
import { defineFamily } from './family.js';
import { occupationLabels } from './labels.js';
import { refusal } from './refusal.js';
import { basisState } from './states.js';
import { tridiagonalSector } from './tridiagonal-sector.js';

const parameters = z.strictObject({
  J: z.number().default(1).describe('tunnelling amplitude between the wells'),
  tilt: z.number().default(0).describe('energy of a boson on the left minus its energy on the right: + tilt (n_a − n_b)/2'),
});

/**
 * H = −J(a†b + b†a) + (U/2)[n_a(n_a − 1) + n_b(n_b − 1)] + tilt (n_a − n_b)/2, tridiagonal in the basis |N − i, i>, i = 0 … N, so that
 * all-left is row 0. Levels at tilt 0: N = 1: ±J; N = 2: U, [U ± √(U² + 16J²)]/2.
 */
export const boseHubbardDimer = defineFamily<z.infer<typeof parameters>>({
  name: 'bose-hubbard-dimer',
  summary: 'N bosons in two wells: H = −J (a†b + b†a) + (U/2) [n_a(n_a−1) + n_b(n_b−1)] + tilt (n_a − n_b)/2.',
  source:
    'Coherent oscillations between two weakly coupled Bose-Einstein condensates: Josephson effects, π oscillations, and macroscopic ' +
    'quantum self-trapping, Phys. Rev. A 59, 620 (1999), DOI 10.1103/PhysRevA.59.620 (mean field: self-trapping from all-left above U N/(2J) = 2)',
  energyUnit: 'that of U and J, usually J = 1',
  size: { symbol: 'N', meaning: 'number of bosons', minimum: 1, maximum: 1_000_000 },
  coupling: { symbol: 'U', meaning: 'interaction energy of a pair of bosons in one well' },
  scales: [
    { name: 'U', meaning: 'the interaction energy itself', toCoupling: (value) => value },
    {
      name: 'interaction-ratio',
      meaning: 'Λ = U N/(2J)',
      toCoupling(value, size, { J }) {
        if (J === 0 || typeof J !== 'number')
          throw refusal('model.coupling', 'U N/(2J) is not defined without tunnelling', 'parameters.J', J, 'J ≠ 0, or the scale U');
        return (2 * J * value) / size;
      },
    },
  ],
  parameters,
  disordered: false,
  states: [
    { name: 'all-left', meaning: 'all bosons in the left well, |N, 0>', terms: ({ size }) => basisState([size, 0]) },
    { name: 'all-right', meaning: 'all bosons in the right well, |0, N>', terms: ({ size }) => basisState([0, size]) },
    {
      name: 'balanced',
      meaning: 'as many bosons on the left as on the right, |N/2, N/2>',
      needs: 'an even number of bosons',
      terms: ({ size }) => (size % 2 === 0 ? basisState([size / 2, size / 2]) : null),
    },
  ],
  labels: ({ size }) => occupationLabels({ sites: 2, levels: size + 1, total: size, unit: 'bosons' }),
  hilbertDimension: ({ size }) => size + 1,
  extent: ({ size }) => ({
    hilbertDimension: size + 1,
    dimension: size + 1,
    nonzeros: 3 * size + 1,
    storage: 'tridiagonal',
    complex: false,
  }),
  sector({ size, coupling, parameters: { J, tilt } }, support) {
    const pairs = (n: number): number => (n * (n - 1)) / 2;
    const diagonal = Float64Array.from(
      { length: size + 1 },
      (_, right) => coupling * (pairs(size - right) + pairs(right)) + (tilt * (size - 2 * right)) / 2,
    );
    const offDiagonal = Float64Array.from({ length: size }, (_, right) => -J * Math.sqrt((size - right) * (right + 1)));
    const sector = tridiagonalSector(
      diagonal,
      offDiagonal,
      support.map(([, right]) => right),
    );
    return {
      matrix: sector.matrix,
      indexOf: ([, right]) => sector.indexOf([right]),
      labelOf: (row) => sector.labelOf(row).flatMap((right) => [size - right, right]),
    };
  },
});
