/** One particle hopping on a ring or a line, with fluxes, on-site energies and disorder. */
import { z } from 'zod';
import { defineFamily } from './family.js';
import type { Sector } from './family-definition.js';
import { positionLabels } from './labels.js';
import { bonds, checkOnsite, geometryParameter, onsiteParameter, siteEnergies } from './lattice.js';
import { exploreSector } from './product-basis.js';
import { basisState } from './states.js';
import type { Label } from './states.js';
import { tridiagonalSector } from './tridiagonal-sector.js';
import type { SystemRequest } from './types.js';

const parameters = z.strictObject({
  geometry: geometryParameter,
  phase: z
    .number()
    .default(0)
    .describe('phase θ of every bond in radians: a hop from x to x + 1 carries −g exp(iθ); a ring of L sites encloses the flux Lθ'),
  onsite: onsiteParameter,
});

type Parameters = z.infer<typeof parameters>;

/** A real line is tridiagonal; started from its end, its accessible dimension is known from the structure alone. */
const isTridiagonal = ({ geometry, phase }: Parameters): boolean => geometry === 'line' && phase === 0;

function sector({ size, coupling, parameters, disorder }: SystemRequest<Parameters>, support: readonly Label[]): Sector {
  const { geometry, phase, onsite } = parameters;
  const energies = siteEnergies(onsite, disorder, size);
  if (isTridiagonal(parameters)) {
    return tridiagonalSector(
      energies,
      new Float64Array(size - 1).fill(-coupling),
      support.map(([site]) => site),
    );
  }
  const re = -coupling * Math.cos(phase);
  const im = -coupling * Math.sin(phase);
  const forward = new Map(bonds(size, geometry));
  const backward = new Map([...forward].map(([x, y]) => [y, x]));
  return exploreSector(
    {
      sites: 1,
      levels: size,
      diagonal: ([site]) => energies[site],
      connect(position, emit) {
        const [site] = position;
        const next = forward.get(site);
        const last = backward.get(site);
        if (next !== undefined) {
          position[0] = next;
          emit(re, im);
        }
        if (last !== undefined) {
          position[0] = last;
          emit(re, -im);
        }
        position[0] = site;
      },
    },
    support,
  );
}

/**
 * H = −g Σ_x (e^{iθ}|x+1><x| + h.c.) + Σ_x ε_x |x><x|, each bond once. A uniform ring has E_k = −2g cos(2πk/L − θ); a uniform line
 * E_k = −2g cos(πk/(L+1)), k = 1 … L.
 */
export const tightBinding = defineFamily<Parameters>({
  name: 'tight-binding',
  summary: 'One particle on a lattice: H = −g Σ_x (exp(iθ) |x+1><x| + h.c.) + Σ_x ε_x |x><x|, each bond once.',
  source:
    'Quantum walks: the first detected passage time problem, Phys. Rev. E 95, 032141 (2017), DOI 10.1103/PhysRevE.95.032141; disorder: ' +
    'Absence of diffusion in certain random lattices, Phys. Rev. 109, 1492 (1958), DOI 10.1103/PhysRev.109.1492 (from memory)',
  energyUnit: 'that of the hopping g',
  size: { symbol: 'L', meaning: 'number of sites', minimum: 1, maximum: 65_536 },
  coupling: { symbol: 'g', meaning: 'hopping amplitude between neighbours' },
  scales: [{ name: 'g', meaning: 'the hopping amplitude itself', toCoupling: (value) => value }],
  parameters,
  disordered: true,
  states: [
    { name: 'first', meaning: 'the particle on site 1', terms: () => basisState([0]) },
    { name: 'last', meaning: 'the particle on site L', terms: ({ size }) => basisState([size - 1]) },
    {
      name: 'center',
      meaning: 'the particle on the middle site, of an even number the left of the two',
      terms: ({ size }) => basisState([Math.ceil(size / 2) - 1]),
    },
    {
      name: 'uniform',
      meaning: 'the equal superposition of all sites (quasi-momentum zero)',
      terms: ({ size }) => Array.from({ length: size }, (_, site) => ({ label: [site], re: 1, im: 0 })),
    },
  ],
  checkParameters: ({ size, parameters: { onsite } }) => checkOnsite(onsite, size),
  labels: ({ size }) => positionLabels(size),
  hilbertDimension: ({ size }) => size,
  extent: ({ size, parameters }) => ({
    hilbertDimension: size,
    dimension: size,
    nonzeros: size + 2 * bonds(size, parameters.geometry).length,
    storage: isTridiagonal(parameters) ? 'tridiagonal' : 'sparse',
    complex: parameters.phase !== 0,
  }),
  sector,
});
