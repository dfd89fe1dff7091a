/** Random Hermitian matrices of the three classical Gaussian ensembles, with an optional random diagonal. */
import { z } from 'zod';
import { randomStream } from '../core/random.js';
import { configurationSpace, freeRule } from './configuration-space.js';
import { defineFamily } from './family.js';
import type { Sector } from './family-definition.js';
import { positionLabels } from './labels.js';
import { siteEnergies } from './lattice.js';
import { basisState } from './states.js';
import type { Label } from './states.js';
import type { SystemRequest } from './types.js';

const parameters = z.strictObject({
  ensemble: z
    .enum(['orthogonal', 'unitary', 'symplectic'])
    .default('orthogonal')
    .describe('orthogonal: real symmetric; unitary: complex Hermitian; symplectic: quaternion self-dual, n quaternions = 2n states'),
  seed: z.int().default(0).describe('seed of the matrix; an axis of seeds is a sample of the ensemble'),
});

type Request = SystemRequest<z.infer<typeof parameters>>;

const statesOf = ({ size, parameters: { ensemble } }: Request): number => (ensemble === 'symplectic' ? 2 * size : size);

interface Planes {
  readonly re: Float64Array;
  readonly im: Float64Array | null;
}

/**
 * M with E|M_xy|² = 1 for x ≠ y (for quaternions the modulus) and 2/β on the diagonal, β = 1, 2, 4. Drawn row by row, so that a
 * matrix is the leading block of every larger one of its ensemble and seed.
 */
function draw(request: Request): Planes {
  const { size, parameters } = request;
  const { ensemble, seed } = parameters;
  const stream = randomStream(seed, 'random matrix', ensemble);
  const n = statesOf(request);
  const re = new Float64Array(n * n);
  const im = ensemble === 'orthogonal' ? null : new Float64Array(n * n);
  const set = (x: number, y: number, a: number, b: number): void => {
    re[x * n + y] = a;
    re[y * n + x] = a;
    if (im === null || x === y) return;
    im[x * n + y] = b;
    im[y * n + x] = -b;
  };
  const components = ensemble === 'orthogonal' ? 1 : ensemble === 'unitary' ? 2 : 4;
  const width = Math.sqrt(1 / components);
  for (let x = 0; x < size; x += 1) {
    for (let y = 0; y <= x; y += 1) {
      if (x === y) {
        const value = Math.SQRT2 * width * stream.normal();
        if (ensemble !== 'symplectic') set(x, x, value, 0);
        else for (const spin of [0, 1]) set(2 * x + spin, 2 * x + spin, value, 0);
        continue;
      }
      const q = Array.from({ length: components }, () => width * stream.normal());
      if (ensemble !== 'symplectic') {
        set(x, y, q[0], q[1] ?? 0);
        continue;
      }
      // The quaternion q0 + i(q1 σx + q2 σy + q3 σz) as a 2 × 2 block.
      set(2 * x, 2 * y, q[0], q[3]);
      set(2 * x, 2 * y + 1, q[2], q[1]);
      set(2 * x + 1, 2 * y, -q[2], q[1]);
      set(2 * x + 1, 2 * y + 1, q[0], -q[3]);
    }
  }
  return { re, im };
}

function sector(request: Request, support: readonly Label[]): Sector {
  const { size, coupling, disorder } = request;
  const n = statesOf(request);
  const energies = siteEnergies(0, disorder, size);
  const energyOf = (state: number): number => energies[n === size ? state : state >> 1];
  if (coupling === 0) {
    const kept = support.map(([state]) => state).sort((a, b) => a - b);
    const re = new Float64Array(kept.length ** 2);
    kept.forEach((state, row) => (re[row * (kept.length + 1)] = energyOf(state)));
    return {
      matrix: { kind: 'dense', dimension: kept.length, re, im: null },
      indexOf: ([state]) => kept.indexOf(state),
      labelOf: (row) => [kept[row]],
    };
  }
  const scale = coupling / Math.sqrt(size);
  const { re, im } = draw(request);
  for (const plane of [re, im]) if (plane !== null) for (let k = 0; k < plane.length; k += 1) plane[k] *= scale;
  for (let state = 0; state < n; state += 1) re[state * (n + 1)] += energyOf(state);
  return { matrix: { kind: 'dense', dimension: n, re, im }, indexOf: ([state]) => state, labelOf: (row) => [row] };
}

/**
 * H = g M/√n + diag(ε). M has independent Gaussian elements (real, complex or quaternion) of unit mean square off the diagonal, so that the
 * spectrum of large matrices fills [−2g, 2g]. Disorder of width W adds ε uniform in [−W/2, W/2] (one a quaternion). Quaternion levels
 * come in exact pairs.
 */
export const randomMatrix = defineFamily<z.infer<typeof parameters>>({
  name: 'random-matrix',
  summary: 'Random matrix of the Gaussian orthogonal, unitary or symplectic ensemble: H = g M/√n + diag(ε), with E|M_xy|² = 1.',
  source:
    'The threefold way: algebraic structure of symmetry groups and ensembles in quantum mechanics, J. Math. Phys. 3, 1199 (1962), DOI 10.1063/1.1703863; ' +
    "with a diagonal: 'Repulsion of energy levels' in complex atomic spectra, Phys. Rev. 120, 1698 (1960), DOI 10.1103/PhysRev.120.1698 (both from memory)",
  energyUnit: 'that of g; a quarter of the width of the spectrum where there is no disorder',
  size: { symbol: 'n', meaning: 'rows of the matrix (of quaternions in the symplectic ensemble)', minimum: 1, maximum: 4096 },
  coupling: { symbol: 'g', meaning: 'scale of the random matrix' },
  scales: [{ name: 'g', meaning: 'the scale itself', toCoupling: (value) => value }],
  parameters,
  disordered: true,
  states: [
    { name: 'first', meaning: 'the first basis state', terms: () => basisState([0]) },
    { name: 'last', meaning: 'the last basis state', terms: (request) => basisState([statesOf(request) - 1]) },
  ],
  labels: (request) => positionLabels(statesOf(request)),
  space: (request) => configurationSpace(freeRule(1, statesOf(request))),
  hilbertDimension: statesOf,
  extent(request) {
    const n = statesOf(request);
    const complex = request.parameters.ensemble !== 'orthogonal';
    return { hilbertDimension: n, dimension: n, nonzeros: n * n, storage: 'dense', complex };
  },
  sector,
});
